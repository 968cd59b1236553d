"""Posterior summaries of Dirichlet columns, by SciPy.

    python3 make.py > values.json

Credible intervals are equal-tailed; a cell without events has [0, one-sided limit]. Each quantile is put back into
SciPy's cdf before it is written: old versions are wrong in some tails.
"""
import json

import numpy as np
import scipy
from scipy import stats

CREDIBILITIES = [0.68, 0.95]
COLUMNS = {
    "a full column": ([120000, 5321, 88, 3, 0, 1, 47000], 0.5),
    "a thin column": ([0, 2, 5, 1, 0], 1.0),
    "an empty column": ([0, 0, 0], 0.5),
    "a light prior": ([40, 0, 3], 1e-3),
}


def quantile(p, a, b):
    x = stats.beta.ppf(p, a, b)
    assert abs(stats.beta.cdf(x, a, b) - p) < 1e-12, (p, a, b, x)
    return x


def interval(n, a, rest, credibility):
    tail = (1 - credibility) / 2
    return [0.0, quantile(credibility, a, rest)] if n == 0 else [quantile(tail, a, rest), quantile(1 - tail, a, rest)]


rows = []
for name, (events, c) in COLUMNS.items():
    a = np.asarray(events, float) + c
    d = stats.dirichlet(a)
    ends = {str(p): [interval(n, ak, a.sum() - ak, p) for n, ak in zip(events, a)] for p in CREDIBILITIES}
    rows.append(
        {
            "name": name,
            "events": events,
            "pseudoCount": c,
            "mean": d.mean().tolist(),
            "sd": np.sqrt(d.var()).tolist(),
            "intervals": ends,
        }
    )
print(json.dumps({"maker": "make.py", "scipy": scipy.__version__, "columns": rows}, indent=1))
