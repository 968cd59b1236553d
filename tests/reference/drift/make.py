"""An invented campaign of six runs, drifted in one run over some columns, and what NumPy and SciPy say of it.

The response is a Gaussian of width 0.9 bins over 12 outcomes. Run 4 has its gain raised by 0.6 bins in columns 5 to 8;
column 8 has too few events to show it. p-values are parametric bootstraps of 20,000 tables, apart from the program's.
Run: python3 make.py > values.json
"""
import json
import sys

import numpy as np
import scipy
from scipy.stats import false_discovery_control, norm

rng = np.random.default_rng(20261201)
RUNS, COLUMNS, OUTCOMES, TABLES = 6, 10, 12, 20_000
events = [600, 900, 1500, 4000, 4000, 3000, 2500, 6000, 60, 4000]


def response(centre):
    p = np.diff(norm.cdf(np.linspace(-0.5, OUTCOMES - 0.5, OUTCOMES + 1), centre, 0.9))
    return p / p.sum()


def g_squared(table):
    table = table[table.sum(axis=1) > 0][:, table.sum(axis=0) > 0]
    expected = np.outer(table.sum(axis=1), table.sum(axis=0)) / table.sum()
    ratio = np.where(table > 0, table / expected, 1)
    return 2 * np.sum(table * np.log(ratio)), (table.shape[0] - 1) * (table.shape[1] - 1)


def bootstrap(table, observed):
    pool = table.sum(axis=0) / table.sum()
    drawn = np.stack([rng.multinomial(n, pool, TABLES) for n in table.sum(axis=1)], axis=1)
    expected = drawn.sum(axis=2, keepdims=True) * drawn.sum(axis=1, keepdims=True) / table.sum()
    with np.errstate(divide="ignore", invalid="ignore"):
        g = 2 * np.nansum(np.where(drawn > 0, drawn * np.log(drawn / expected), 0), axis=(1, 2))
    distance = 0.5 * np.abs(drawn / drawn.sum(axis=2, keepdims=True)
                            - drawn.sum(axis=1, keepdims=True) / table.sum()).sum(axis=2).max(axis=1)
    return (np.sum(g >= observed) + 1) / (TABLES + 1), distance.mean()


runs = np.zeros((RUNS, COLUMNS, OUTCOMES), dtype=int)
for j in range(COLUMNS):
    for r in range(RUNS):
        shift = 0.6 if r == 3 and 5 <= j <= 8 else 0
        runs[r, j] = rng.multinomial(rng.poisson(events[j] / RUNS), response(1.5 + j + shift))

columns = []
for j in range(COLUMNS):
    table = runs[:, j]
    g, freedom = g_squared(table)
    p, noise = bootstrap(table, g)
    pool = table.sum(axis=0) / table.sum()
    distances = 0.5 * np.abs(table / table.sum(axis=1, keepdims=True) - pool).sum(axis=1)
    columns.append({"gSquared": g, "freedom": int(freedom), "pValue": p, "expectedDistance": noise,
                    "distances": distances.tolist(), "run": int(np.argmax(distances))})
given = [0.04, 0.001, 0.8, 0.03, 0.011, 0.5, 0.03]
json.dump({"made": {"python": sys.version.split()[0], "numpy": np.__version__, "scipy": scipy.__version__, "seed": 20261201},
           "tables": TABLES, "runs": runs.tolist(), "columns": columns,
           "adjusted": {"pValues": given, "values": false_discovery_control(given).tolist()}}, sys.stdout)
