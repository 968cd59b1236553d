"""Folded reference spectrum, its covariance from the matrix, and feed-in: NumPy by closed form (plain) and by draws (weighted).

Six columns (below, four bins, above) by nine outcomes (below, six bins, above, lost), Gaussian response, thin outer columns.
Run: python3 make.py > values.json
"""
import json
import sys

import numpy as np
import scipy
from scipy.stats import norm

rng = np.random.default_rng(44)
COLUMNS, BINS, DRAWS, PRIOR = 6, 6, 400_000, 0.5
EVENTS = [40, 300, 900, 700, 200, 60]
contents = np.array([45.0, 700.0, 500.0, 420.0, 230.0, 40.0])
edges = np.linspace(0, BINS, BINS + 1)


def tallied(n, centre):
    r = rng.normal(centre, 0.9, n)
    outcome = np.where(rng.uniform(size=n) < 0.12, BINS + 2, np.searchsorted(edges, r, side="right"))
    w = rng.exponential(2.0, n)
    table = np.zeros((3, BINS + 3))
    for row, x in zip(table, (np.ones(n), w, w**2)):
        np.add.at(row, outcome, x)
    return table


tables = np.stack([tallied(n, 0.2 + 1.1 * j) for j, n in enumerate(EVENTS)])
counts, weights, squares = tables[:, 0], tables[:, 1], tables[:, 2]


def closed():
    a = counts + PRIOR
    total = a.sum(1, keepdims=True)
    m = a / total
    cov = sum(s**2 * (np.diag(p) - np.outer(p, p)) / (t + 1) for s, p, t in zip(contents, m, total[:, 0]))
    inside = slice(1, BINS + 1)
    mu = contents @ m
    outer = contents[[0, -1]] @ m[[0, -1]]
    part = contents[:, None] ** 2 * m * (1 - m) / (total + 1)
    share = (part[:, inside] / mu[inside]).sum(1)
    draws = np.stack([rng.dirichlet(x, DRAWS // 8) for x in a], axis=1)
    return {**found(mu[inside], cov[inside, inside], outer[inside] / mu[inside], share / share.sum()), **spread(draws, part, m)}


def weighted():
    scale = np.where(weights > 0, squares / np.where(weights > 0, weights, 1), squares.sum(1, keepdims=True) / weights.sum(1, keepdims=True))
    shape = np.where(weights > 0, weights**2 / np.where(squares > 0, squares, 1), 0) + PRIOR
    x = rng.gamma(shape, size=(DRAWS, *shape.shape)) * scale
    p = x / x.sum(2, keepdims=True)
    inside = slice(1, BINS + 1)
    m = p.mean(0)
    mu = np.einsum("j,rjk->rk", contents, p)
    cov = sum(s**2 * np.cov(p[:, j].T) for j, s in enumerate(contents))
    outer = contents[[0, -1]] @ m[[0, -1]]
    part = contents[:, None] ** 2 * p.var(0)
    share = (part[:, inside] / mu.mean(0)[inside]).sum(1)
    return {**found(mu.mean(0)[inside], cov[inside, inside], outer[inside] / mu.mean(0)[inside], share / share.sum()),
            **spread(p[:50_000], part, m)}


def found(mu, cov, feed_in, share):
    return {"folded": mu.tolist(), "covariance": cov.tolist(), "feedIn": feed_in.tolist(), "columnShares": share.tolist()}


def spread(p, part, m):
    """Posterior of feed-in and of the ratio matrix / data variance, as quantiles and probabilities beyond the limits."""
    mu = np.einsum("j,rjk->rk", contents, p)
    feed = np.einsum("j,rjk->rk", contents[[0, -1]], p[:, [0, -1]]) / mu
    precision = part / (contents[:, None] ** 2 * m * (1 - m))
    ratio = np.einsum("jk,rjk->rk", contents[:, None] ** 2 * precision, p * (1 - p)) / mu
    inside = slice(1, BINS + 1)
    q = [0.025, 0.5, 0.975]
    return {"feedInQuantiles": np.quantile(feed[:, inside], q, axis=0).tolist(), "feedInBeyond": (feed[:, inside] > 0.1).mean(0).tolist(),
            "ratioQuantiles": np.quantile(ratio[:, inside], q, axis=0).tolist(), "ratioBeyond": (ratio[:, inside] > 1).mean(0).tolist()}


# A response without any events: the share that feed-in must come to.
pure = np.stack([np.concatenate([[norm.cdf(0, c, 0.9)], np.diff(norm.cdf(edges, c, 0.9)), [norm.sf(BINS, c, 0.9)]])
                 for c in 0.2 + 1.1 * np.arange(COLUMNS)])
analytic = (contents[[0, -1]] @ pure[[0, -1]] / (contents @ pure))[1:-1]
json.dump({"made": {"python": sys.version.split()[0], "numpy": np.__version__, "scipy": scipy.__version__, "seed": 44},
           "draws": DRAWS, "contents": contents.tolist(), "counts": counts.tolist(), "weights": weights.tolist(), "squares": squares.tolist(),
           "plain": closed(), "weighted": weighted(), "pure": pure.tolist(), "analyticFeedIn": analytic.tolist()}, sys.stdout, indent=1)
