"""Binomial probabilities from SciPy, in classes of at least 1 % each, for a chi-square test of the variates.

Run: python3 make.py > values.json
"""
import json
import sys

import numpy as np
import scipy
from scipy.stats import binom, chi2

cases = []
for n, p in [(1, 0.3), (7, 0.5), (40, 0.02), (19, 0.5), (999, 0.01), (1001, 0.01), (25, 0.4), (60, 0.9),
             (5000, 0.37), (10**6, 2e-6), (10**9, 0.25), (10**12, 1e-10)]:
    # Classes: cut points at quantiles, made unique.
    cuts = sorted({int(binom.ppf(q, n, p)) for q in np.linspace(0.02, 0.98, 41)})
    edges = [-1, *cuts, n]
    edges = sorted(set(edges))
    prob = np.diff(binom.cdf(edges, n, p))
    keep = [edges[0]]
    for left, right, mass in zip(edges, edges[1:], prob):
        if mass > 0:
            keep.append(right)
    prob = np.diff(binom.cdf(keep, n, p))
    cases.append({"trials": n, "p": p, "upTo": keep[1:], "probability": prob.tolist(),
                  "limit": float(chi2.ppf(1 - 1e-6, max(1, len(prob) - 1)))})
json.dump({"made": {"python": sys.version.split()[0], "numpy": np.__version__, "scipy": scipy.__version__},
           "cases": cases}, sys.stdout, indent=1)
