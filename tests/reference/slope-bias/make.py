"""A response that changes over the bin, calibrated flat, used with a steep spectrum: what NumPy and SciPy say of it.

Column j holds true values in [j, j + 1); an event of true value t ends in one of 10 outcomes by a Gaussian of width 0.8 about
t + 2 (so that the halves differ), and is lost with probability 0.1. Weighted copy: weights exponential of mean 1.5.
Run: python3 make.py > values.json
"""
import json
import sys

import numpy as np
import scipy
from scipy.stats import norm

rng = np.random.default_rng(8)
BINS, OUTCOMES, DRAWS, PRIOR = 4, 10, 400_000, 0.5
EVENTS = [5000, 300, 2000, 40]
reference = [0.58, 0.58, 0.52, 0.58]
edges = np.linspace(0, OUTCOMES, OUTCOMES + 1)


def tally(t, r, weight):
    """[halves, outcomes + below, above, lost] sums."""
    inside = np.searchsorted(edges, r, side="right")
    outcome = np.where(np.isnan(r), OUTCOMES + 2, inside)
    half = ((t % 1) >= 0.5).astype(int)
    table = np.zeros((2, OUTCOMES + 3))
    np.add.at(table, (half, outcome), weight)
    return table


def gammas(shape, scale):
    return rng.gamma(shape, size=(DRAWS, len(shape))) * scale


def draw(table, weights, squares, prior):
    if weights is None:
        x = gammas(table + prior, 1)
    else:
        scale = np.where(weights > 0, squares / np.where(weights > 0, weights, 1), squares.sum() / weights.sum())
        x = gammas(np.where(weights > 0, weights**2 / np.where(squares > 0, squares, 1), 0) + prior, scale)
    return x / x.sum(axis=1, keepdims=True)


def study(counts, weights=None, squares=None, g=0.5):
    content = counts if weights is None else weights
    f = content[0].sum() / content.sum()
    halves = [draw(counts[h], None if weights is None else weights[h], None if squares is None else squares[h], PRIOR * share)
              for h, share in enumerate([f, 1 - f])]
    whole = draw(counts.sum(0), None if weights is None else weights.sum(0), None if squares is None else squares.sum(0), PRIOR)
    bias = (g - f) * (halves[0].mean(0) - halves[1].mean(0))
    sd = whole.std(0)
    k = int(np.argmax(np.abs(bias) / sd))
    draws = np.abs((g - f) * (halves[0][:, k] - halves[1][:, k])) / sd[k]
    return {"calibration": f, "outcome": k, "bias": bias[k], "sd": sd[k], "ratio": abs(bias[k]) / sd[k],
            "lower": np.quantile(draws, 0.025), "upper": np.quantile(draws, 0.975), "probability": float((draws > 1).mean())}


out = {"halves": [], "weights": [], "squares": [], "plain": [], "weighted": [], "predicted": []}
for j, n in enumerate(EVENTS):
    t = j + rng.uniform(size=n)
    r = np.where(rng.uniform(size=n) < 0.1, np.nan, rng.normal(t + 2, 0.8))
    w = rng.exponential(1.5, size=n)
    counts, weights, squares = (tally(t, r, x) for x in (np.ones(n), w, w**2))
    out["halves"].append(counts.tolist())
    out["weights"].append(weights.tolist())
    out["squares"].append(squares.tolist())
    out["plain"].append(study(counts, g=reference[j]))
    out["weighted"].append(study(counts, weights, squares, g=reference[j]))
    # The change that the reference spectrum makes to the cells, by integration over each half: no events at all.
    half = [0.9 * np.diff(norm.cdf(edges, (j + s + np.linspace(0.0005, 0.4995, 500)[:, None]) + 2, 0.8)).mean(0) for s in (0, 0.5)]
    out["predicted"].append({"differences": (half[0] - half[1]).tolist()})
json.dump({"made": {"python": sys.version.split()[0], "numpy": np.__version__, "scipy": scipy.__version__, "seed": 8},
           "draws": DRAWS, "reference": reference, **out}, sys.stdout, indent=1)
