"""Two campaigns of the same axes, one column of the second with its gain raised: differences by NumPy, tests by bootstrap.

Four bins and two outer columns by seven outcomes. The second campaign's copy with weights (of its own scale, about 50) is given too.
Run: python3 make.py > values.json
"""
import json
import sys

import numpy as np
import scipy
from scipy.stats import norm

rng = np.random.default_rng(31)
COLUMNS, BINS, PRIOR, DRAWS, TABLES = 6, 4, 0.5, 200_000, 20_000
edges = np.linspace(0, BINS, BINS + 1)
contents = np.array([20.0, 300.0, 260.0, 200.0, 120.0, 15.0])


def campaign(sizes, shift):
    table = np.zeros((3, COLUMNS, BINS + 3))
    for j, n in enumerate(sizes):
        r = rng.normal(j - 0.5 + (shift if j == 2 else 0), 0.7, n)
        outcome = np.where(rng.uniform(size=n) < 0.1, BINS + 2, np.searchsorted(edges, r, side="right"))
        w = 50 * rng.exponential(1, n)
        for row, x in zip(table, (np.ones(n), w, w**2)):
            np.add.at(row[j], outcome, x)
    return table


first = campaign([60, 900, 1200, 700, 300, 40], 0)
second = campaign([50, 600, 800, 900, 250, 0], 0.25)


def g_squared(table):
    table = table[:, table.sum(0) > 0]
    expected = np.outer(table.sum(1), table.sum(0)) / table.sum()
    return 2 * np.sum(np.where(table > 0, table * np.log(np.where(table > 0, table, 1) / expected), 0)), table.shape[1] - 1


columns = []
for j in range(COLUMNS):
    a, b = first[0, j], second[0, j]
    if b.sum() == 0:
        columns.append(None)
        continue
    table = np.stack([a, b])
    g, freedom = g_squared(table)
    pool = table.sum(0) / table.sum()
    drawn = np.stack([rng.multinomial(int(n), pool, TABLES) for n in table.sum(1)], axis=1)
    p = (1 + sum(g_squared(t)[0] >= g - 1e-9 for t in drawn)) / (TABLES + 1)
    tv = 0.5 * np.abs(drawn[:, 0] / a.sum() - drawn[:, 1] / b.sum()).sum(1)
    x, y = (rng.dirichlet(c + PRIOR, DRAWS) for c in (a, b))
    pa, pb = (a + PRIOR) / (a + PRIOR).sum(), (b + PRIOR) / (b + PRIOR).sum()
    above = pa > pb
    moved = (x - y)[:, above].sum(1)
    q = [0.025, 0.975]
    columns.append({"distance": 0.5 * np.abs(pa - pb).sum(), "interval": np.maximum(0, np.quantile(moved, q)).tolist(),
                    "expectedDistance": tv.mean(), "gSquared": g, "freedom": freedom, "pValue": p,
                    "difference": ((b + PRIOR) / (b + PRIOR).sum() - (a + PRIOR) / (a + PRIOR).sum()).tolist(),
                    "lower": np.quantile(y - x, q[0], axis=0).tolist(), "upper": np.quantile(y - x, q[1], axis=0).tolist()})


def folded(counts):
    alpha = counts + PRIOR
    total = alpha.sum(1, keepdims=True)
    m = alpha / total
    v = m * (1 - m) / (total + 1)
    return (contents @ m)[1:-2], (contents**2 @ v)[1:-2]


(mu1, v1), (mu2, v2) = folded(first[0]), folded(second[0])
half = norm.ppf(0.975) * np.sqrt(v1 + v2)
json.dump({"made": {"python": sys.version.split()[0], "numpy": np.__version__, "scipy": scipy.__version__, "seed": 31}, "tables": TABLES,
           "contents": contents.tolist(), "first": first.tolist(), "second": second.tolist(), "columns": columns,
           "change": {"value": (mu2 - mu1).tolist(), "lower": (mu2 - mu1 - half).tolist(), "upper": (mu2 - mu1 + half).tolist()}}, sys.stdout)
