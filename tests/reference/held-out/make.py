"""Expected values for the held-out events of tests/main/held-out.test.ts.

The events themselves are made twice, here and in the test, by the same integer recipe: no file of them is kept. Counts
are numpy's, posterior moments and interval ends SciPy's. Run: python3 make.py > expected.json
"""
import json
import sys

import numpy as np
import scipy
from scipy import stats

ROWS = 120_000
TRUE_EDGES = [1.5, 7.5, 12.25, 20, 31, 45.5, 60, 82, 110, 150, 190]
RECO_EDGES = [2.5, 6, 9.75, 15, 22, 30.5, 41, 55, 70, 90, 120, 160, 185]


def events():
    """(true value, reconstructed value or None) in thousandths, by a linear congruential generator."""
    state = 20261201

    def word():
        nonlocal state
        state = (state * 1664525 + 1013904223) % 2**32
        return state >> 8

    for _ in range(ROWS):
        true = word() % 1000 * (word() % 1000) * 215 // 1000 + word() % 7
        spread = (word() % 2001 + word() % 2001 - 2000) * (true // 100 + 60) // 120
        reco = max(0, true * 97 // 100 + spread)
        yield true, None if word() % 100 < 9 else reco


def main():
    rows = list(events())
    t = np.array([a for a, _ in rows]) / 1000
    r = np.array([np.nan if b is None else b / 1000 for _, b in rows])
    lost = np.isnan(r)
    te = np.concatenate([[-np.inf], TRUE_EDGES, [np.inf]])
    re = np.concatenate([[-np.inf], RECO_EDGES, [np.inf]])
    # numpy closes the last bin, which reaches to infinity here: the top edge is "above", as in Entasis.
    seen, _, _ = np.histogram2d(t[~lost], r[~lost], bins=[te, re])
    missed, _ = np.histogram(t[lost], bins=te)
    counts = np.concatenate([seen, missed[:, None]], axis=1).astype(int)
    a = counts + 0.5
    total = a.sum(axis=1, keepdims=True)
    marginal = stats.beta(a, total - a)
    lower = np.where(counts == 0, 0, marginal.ppf(0.025))
    upper = np.where(counts == 0, marginal.ppf(0.95), marginal.ppf(0.975))
    json.dump(
        {
            "maker": "tests/reference/held-out/make.py",
            "versions": {"numpy": np.__version__, "scipy": scipy.__version__},
            "trueEdges": TRUE_EDGES,
            "recoEdges": RECO_EDGES,
            "counts": counts.tolist(),
            "mean": marginal.mean().tolist(),
            "sd": marginal.std().tolist(),
            "lower": lower.tolist(),
            "upper": upper.tolist(),
        },
        sys.stdout,
    )


main()
