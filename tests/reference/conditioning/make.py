"""Singular values by LAPACK, and the noise level and resolvable components by NumPy, of response matrices of known spectrum.

`banded`: circulant smearing (a, 1 - 2 a, a) of 12 bins, whose singular values are |1 - 2 a + 2 a cos(2 pi k / 12)|, known without
any program; `wide`: 8 true by 12 reconstructed bins, Gaussian; `narrow`: 6 true by 4 reconstructed. Counts are the events
expected, and n of them a column. The noise level is the 95 % quantile of the spectral norm over 20,000 Dirichlet matrices.
Run: python3 make.py > values.json
"""
import json
import sys

import numpy as np
import scipy
from scipy.stats import norm

rng = np.random.default_rng(99)
PRIOR, DRAWS = 0.5, 20_000


def circulant(bins, a):
    p = np.zeros((bins, bins))
    for j in range(bins):
        p[j, j] += 1 - 2 * a
        p[j, (j + 1) % bins] += a
        p[j, (j - 1) % bins] += a
    return p


def gaussian(true, reco, width):
    edges = np.linspace(0, true, reco + 1)
    return np.stack([np.diff(norm.cdf(edges, j + 0.5, width)) for j in range(true)])


def case(name, p, n, exact=None):
    counts = np.zeros((p.shape[0] + 2, p.shape[1] + 2))
    counts[1:-1, 1:-1] = np.round(p * n)
    a = counts + PRIOR
    mean = (a / a.sum(1, keepdims=True))[1:-1, 1:-1]
    values = np.linalg.svd(mean, compute_uv=False)
    norms, first = [], []
    for r in range(DRAWS):
        x = rng.gamma(a)
        q = (x / x.sum(1, keepdims=True))[1:-1, 1:-1]
        norms.append(np.linalg.norm(q - mean, 2))
        if r < 4000:
            first.append(np.linalg.svd(q, compute_uv=False))
    first = np.array(first)
    level = np.quantile(norms, 0.95)
    return {"name": name, "counts": counts.tolist(), "singularValues": values.tolist(), "exact": exact, "noise": level,
            "noiseSd": float(np.std(norms)), "resolvable": int((values > level).sum()), "mean": first.mean(0).tolist(), "sd": first.std(0).tolist()}


k = np.arange(12)
exact = sorted(np.abs(1 - 0.5 + 0.5 * np.cos(2 * np.pi * k / 12)), reverse=True)
cases = [
    case("circulant, full", circulant(12, 0.25), 200_000, exact),
    case("circulant, thin", circulant(12, 0.25), 400, exact),
    case("wide", gaussian(8, 12, 0.8), 3000),
    case("narrow", gaussian(6, 4, 0.4), 3000),
    case("one bin", np.array([[0.8]]), 50),
]
json.dump({"made": {"python": sys.version.split()[0], "numpy": np.__version__, "scipy": scipy.__version__, "seed": 99},
           "draws": DRAWS, "cases": cases}, sys.stdout, indent=1)
