"""Neighbour prior of an invented campaign, by numpy and SciPy, written on its own from the definition.

    python3 make.py > values.json

Mean of a true bin: contents of the bins beside it, moved along the reconstructed axis by the distance of the true-bin
centres (in ln on a log axis) and binned again by area, pooled, normalised, mixed with 5 % even. Strength: maximum over
kappa of the summed log Dirichlet-multinomial evidence of the columns whose prior the column does not enter, by
scipy.optimize.minimize_scalar; the log evidence is a sum of scipy.special.gammaln. Other columns: 1/2 an outcome.
"""
import json

import numpy as np
import scipy
from scipy.optimize import minimize_scalar
from scipy.special import gammaln

rng = np.random.default_rng(20261103)


def moved(content, edges, d):
    """Area re-binning through the piecewise linear cumulative content."""
    inside = content[1 : len(edges)]
    cumulative = np.concatenate([[0], np.cumsum(inside)])
    at = np.interp(edges, edges + d, cumulative)
    out = content.copy()
    out[1 : len(edges)] = np.diff(at)
    out[0] += at[0]
    out[len(edges)] += cumulative[-1] - at[-1]
    return out


def log_evidence(kappa, n, m):
    return gammaln(kappa) - gammaln(n.sum() + kappa) + (gammaln(n + kappa * m) - gammaln(kappa * m)).sum()


def neighbour_prior(counts, true_edges, reco_edges, log):
    columns, outcomes = counts.shape
    bins = len(true_edges) - 1
    f = np.log if log else (lambda x: x)
    centres = np.sqrt(true_edges[1:] * true_edges[:-1]) if log else (true_edges[1:] + true_edges[:-1]) / 2
    means, sources = {}, {}
    for j in range(1, bins + 1):
        sources[j] = [i for i in (j - 1, j + 1) if 1 <= i <= bins and counts[i].sum() > 0]
        if sources[j]:
            pooled = sum(moved(counts[i], f(reco_edges), f(centres[j - 1]) - f(centres[i - 1])) for i in sources[j])
            means[j] = 0.95 * pooled / pooled.sum() + 0.05 / outcomes
    prior = np.full((columns, outcomes), 0.5)
    strengths = np.zeros(columns)

    def best(members):
        g = lambda x: -sum(log_evidence(np.exp(x), counts[i], means[i]) for i in members)
        grid = np.linspace(np.log(0.1), np.log(1e6), 200)
        top = np.clip(np.argmin([g(x) for x in grid]), 1, len(grid) - 2)
        return float(np.exp(minimize_scalar(g, bounds=(grid[top - 1], grid[top + 1]), method="bounded", options={"xatol": 1e-9}).x))

    for j in means:
        members = [i for i in means if i != j and j not in sources[i] and counts[i].sum() > 0]
        if members:
            strengths[j] = best(members)
            prior[j] = strengths[j] * means[j]
    return means, strengths, prior, best([i for i in means if counts[i].sum() > 0])


def sensitivity(counts, neighbours, own):
    """Means and sds under four priors, and the largest change of a mean in units of the sd under `own`."""
    outcomes = counts.shape[1]
    priors = {
        "flat": np.ones_like(counts),
        "Jeffreys": np.full_like(counts, 0.5),
        "shared total": np.full_like(counts, 1 / outcomes),
        "neighbours": neighbours,
    }
    found = {}
    for name, prior in priors.items():
        a = counts + prior
        total = a.sum(axis=1, keepdims=True)
        found[name] = (a / total, np.sqrt(a * (total - a) / (total**2 * (total + 1))))
    changes = {name: np.abs(mean - found[own][0]) / found[own][1] for name, (mean, _) in found.items()}
    most = max(changes, key=lambda name: changes[name].max())
    place = np.unravel_index(changes[most].argmax(), counts.shape)
    return {
        "own": own,
        "priors": {name: {"mean": m.ravel().tolist(), "sd": s.ravel().tolist()} for name, (m, s) in found.items()},
        "largest": {"prior": most, "column": int(place[0]), "outcome": int(place[1]), "inSd": changes[most].max()},
    }


def campaign(true_edges, reco_edges, per_column, log):
    bins, outcomes = len(true_edges) - 1, len(reco_edges) + 2
    counts = np.zeros((bins + 2, outcomes))
    for j in range(bins + 2):
        lo, hi = true_edges[max(0, j - 1)], true_edges[min(bins, j)]
        n = per_column[j]
        t = rng.uniform(lo, hi, n)
        r = 0.95 * t * np.exp(rng.normal(0, 0.12, n)) if log else 0.95 * t + rng.normal(0, 0.4, n)
        lost = rng.uniform(size=n) < 0.2
        counts[j] = np.bincount(np.where(lost, outcomes - 1, np.searchsorted(reco_edges, r, side="right")), minlength=outcomes)
    return counts


CASES = {
    "linear axes": (np.linspace(0, 8, 9), np.linspace(0, 9, 13), [5, 400, 90, 700, 0, 60, 800, 300, 12, 20], False),
    "log axes": (np.geomspace(1, 100, 8), np.geomspace(0.8, 120, 11), [0, 300, 150, 900, 40, 500, 200, 80, 3], True),
}
rows = []
for name, (true_edges, reco_edges, per_column, log) in CASES.items():
    counts = campaign(true_edges, reco_edges, per_column, log)
    means, strengths, prior, overall = neighbour_prior(counts, true_edges, reco_edges, log)
    kappas = np.array([0.1, 10.0, 1000.0, 1e6])
    curve = [sum(log_evidence(k, counts[j], means[j]) for j in means) for k in kappas]
    rows.append(
        {
            "name": name,
            "spacing": "log" if log else "linear",
            "trueEdges": true_edges.tolist(),
            "recoEdges": reco_edges.tolist(),
            "events": counts.tolist(),
            "strengths": strengths.tolist(),
            "strength": overall,
            "prior": prior.tolist(),
            "sensitivity": sensitivity(counts, prior, "Jeffreys"),
            "curve": {"kappa": kappas.tolist(), "logEvidence": curve},
        }
    )
print(json.dumps({"maker": "make.py", "numpy": np.__version__, "scipy": scipy.__version__, "seed": 20261103, "cases": rows}, indent=1))
