"""Stability, purity, bias, resolution and order of means of an invented campaign, by numpy and SciPy.

    python3 make.py > values.json

Values are those of the posterior mean matrix; interval ends are quantiles of 200,000 matrices drawn from the posterior
(numpy's dirichlet, or normalised gammas where weighted), those of stability from scipy.stats.beta. Columns: below, eight
bins from 0 to 8, above; outcomes: below, eight bins, above, lost. Jeffreys prior; 95 %.
"""
import json

import numpy as np
import scipy
from scipy import stats

SEED = 20261104
DRAWS = 200_000
rng = np.random.default_rng(SEED)
edges = np.linspace(0, 8, 9)
centres = (edges[1:] + edges[:-1]) / 2
PER_COLUMN = [200, 900, 60, 1500, 300, 40, 700, 5, 2500, 80]
spectrum = np.array([50.0, 400, 800, 700, 500, 300, 200, 120, 80, 30])


def events():
    counts = np.zeros((10, 11))
    for j, n in enumerate(PER_COLUMN):
        lo, hi = [(-2, 0), *zip(edges[:-1], edges[1:]), (8, 10)][j]
        r = 0.97 * rng.uniform(lo, hi, n) + 0.1 + rng.normal(0, 0.6, n)
        outcome = np.where(rng.uniform(size=n) < 0.15, 10, np.searchsorted(edges, r, side="right"))
        counts[j] = np.bincount(outcome, minlength=11)
    return counts


def half_width(p):
    """Half the distance of the 15.87 % and 84.13 % points of binned content, one row a replica."""
    share = np.cumsum(p, axis=1) / p.sum(axis=1, keepdims=True)
    tail = stats.norm.sf(1)
    return np.array([(np.interp(1 - tail, [0, *row], edges) - np.interp(tail, [0, *row], edges)) / 2 for row in share])


def ends(draws):
    return np.quantile(draws, [0.025, 0.975]).tolist()


def measures(counts, shape, scale):
    draws = [rng.gamma(a, size=(DRAWS, 11)) * s for a, s in zip(shape, scale)]
    draws = [x / x.sum(axis=1, keepdims=True) for x in draws]
    mean = np.array([d.mean(axis=0) for d in draws]) if np.ptp(scale) else shape / shape.sum(axis=1, keepdims=True)
    out = {"stability": [], "purity": [], "bias": [], "resolution": [], "step": []}
    window = slice(1, 9)
    means = []
    for j in range(1, 9):
        p = draws[j][:, window]
        inside = p.sum(axis=1)
        m = mean[j, window]
        if np.ptp(scale):
            out["stability"].append([float((p[:, j - 1] / inside).mean()), *ends(p[:, j - 1] / inside)])
        else:
            b = stats.beta(shape[j, j], shape[j, window].sum() - shape[j, j])
            out["stability"].append([b.mean(), b.ppf(0.025), b.ppf(0.975)])
        bin_draws = sum(spectrum[i] * draws[i][:, j] for i in range(10))
        value = spectrum[j] * mean[j, j] / (spectrum @ mean[:, j])
        out["purity"].append([float(value), *ends(spectrum[j] * draws[j][:, j] / bin_draws)])
        shift = (p @ (centres - centres[j - 1])) / inside
        q = (p / inside[:, None]).mean(axis=0) if np.ptp(scale) else m / m.sum()
        out["bias"].append([float(q @ (centres - centres[j - 1])), *ends(shift)])
        out["resolution"].append([float(half_width(q[None, :])[0]), *ends(half_width(p[:20_000]))])
        means.append((p @ centres) / inside)
        if j > 1:
            step = means[-1] - means[-2]
            out["step"].append([float(step.mean()), *ends(step), float((step < 0).mean())])
    return out


counts = events()
ones = np.ones_like(counts)
unweighted = measures(counts, counts + 0.5, ones)
weight = counts * (1 + 0.5 * (np.arange(11) % 3))
square = counts * (1.3 + np.arange(11) % 3) ** 2
scale = np.where(counts > 0, square / np.where(counts > 0, weight, 1), (square.sum(1) / weight.sum(1))[:, None])
shape = np.where(counts > 0, weight**2 / np.where(counts > 0, square, 1), 0) + 0.5
weighted = measures(counts, shape, scale)
print(
    json.dumps(
        {
            "maker": "make.py",
            "numpy": np.__version__,
            "scipy": scipy.__version__,
            "seed": SEED,
            "draws": DRAWS,
            "spectrum": spectrum.tolist(),
            "events": counts.tolist(),
            "weights": weight.tolist(),
            "squares": square.tolist(),
            "unweighted": unweighted,
            "weighted": weighted,
        },
        indent=1,
    )
)
