"""Least additions of events under bounds on variances, and best spreads of a fixed number, by SciPy's general optimisers.

Minimise sum n_j under sum_j c_jk / (P_j + g_j n_j) <= b_k, n >= 0 (SLSQP), and sum_j w_j / (P_j + g_j n_j) under sum n_j = N (SLSQP).
Run: python3 make.py > values.json
"""
import json
import sys

import numpy as np
import scipy
from scipy.optimize import minimize

rng = np.random.default_rng(5)


def least(p, g, c, b):
    scale = p.sum()
    def slack(x):
        return (b - (c / (p + g * x * scale)[:, None]).sum(0)) / b
    best = None
    for start in (0.1, 1.0, 5.0):
        r = minimize(lambda x: x.sum(), np.full(len(p), start), jac=lambda x: np.ones_like(x), method="SLSQP",
                     bounds=[(0, None)] * len(p), constraints={"type": "ineq", "fun": slack}, options={"maxiter": 2000, "ftol": 1e-13})
        if slack(r.x).min() > -1e-7 and (best is None or r.fun < best.fun):
            best = r
    return best.x * scale


def best(p, g, w, n):
    r = minimize(lambda x: (w / (p + g * n * x)).sum() / (w / p).sum(), np.full(len(p), 1 / len(p)), method="SLSQP",
                 bounds=[(0, 1)] * len(p), constraints={"type": "eq", "fun": lambda x: x.sum() - 1}, options={"maxiter": 5000, "ftol": 1e-15})
    return r.x * n, float((w / (p + g * r.x * n)).sum())


cases = []
for columns, constraints, tight in [(4, 1, 0.5), (6, 5, 0.4), (8, 8, 0.1), (5, 3, 0.9), (10, 7, 0.02)]:
    p = np.exp(rng.uniform(2, 7, columns))
    g = rng.uniform(0.3, 1.0, columns)
    c = np.exp(rng.uniform(-3, 3, (columns, constraints))) * (rng.uniform(size=(columns, constraints)) < 0.7)
    c[0] += 1e-3
    now = (c / p[:, None]).sum(0)
    b = now * tight * rng.uniform(0.7, 1.4, constraints)
    n = least(p, g, c, b)
    w = (c / b).sum(1)
    spread, value = best(p, g, w, 2 * p.sum())
    cases.append({"totals": p.tolist(), "growth": g.tolist(), "c": c.tolist(), "bound": b.tolist(), "least": n.tolist(),
                  "weights": w.tolist(), "events": 2 * p.sum(), "best": spread.tolist(), "value": value})
json.dump({"made": {"python": sys.version.split()[0], "numpy": np.__version__, "scipy": scipy.__version__, "seed": 5}, "cases": cases}, sys.stdout, indent=1)
