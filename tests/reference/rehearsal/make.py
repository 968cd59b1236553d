"""Posterior of contents and matrix from untagged data by the plain sampler (losses imputed), and the law of the shown share by quadrature.

The plain data-augmented Gibbs sampler of Tanner & Wong with every hidden event imputed: another sampler of the same law than the program's.
Run: python3 make.py > values.json   (two minutes)
"""
import json
import sys

import numpy as np
import mpmath as mp

rng = np.random.default_rng(17)
SWEEPS, CHAINS = 60_000, 40


def gibbs(shape, shown, y, a, b, free):
    """CHAINS chains side by side; moments of s and p with standard errors from the chains' means."""
    columns, outcomes = shape.shape
    hidden = [k for k in range(outcomes) if k not in shown]
    s = rng.gamma(a, size=(CHAINS, columns)) / b
    p = np.broadcast_to(shape / shape.sum(1, keepdims=True), (CHAINS, columns, outcomes)).copy()
    keep_s, keep_p = [], []
    means = []
    for i in range(SWEEPS // CHAINS * 8):
        n = np.zeros((CHAINS, columns, outcomes))
        for k, count in zip(shown, y):
            w = s * p[:, :, k]
            n[:, :, k] = rng.multinomial(count, w / w.sum(1, keepdims=True))
        for k in hidden:
            n[:, :, k] = rng.poisson(s * p[:, :, k])
        s = rng.gamma(a + n.sum(2)) / (b + 1)
        if free:
            x = rng.gamma(shape + n)
            p = x / x.sum(2, keepdims=True)
        if i >= SWEEPS // CHAINS:
            keep_s.append(s)
            keep_p.append(p)
    s, p = np.array(keep_s), np.array(keep_p)

    def report(x):
        m, v = x.mean(0), x.var(0)
        return {"mean": m.mean(0).tolist(), "meanError": (m.std(0, ddof=1) / np.sqrt(CHAINS)).tolist(),
                "sd": np.sqrt(v.mean(0) + m.var(0)).tolist(),
                "sdError": (np.sqrt(v).std(0, ddof=1) / np.sqrt(CHAINS)).tolist()}
    return {"contents": report(s), "matrix": report(p)}


shape = np.array([[6.5, 2.5, 1.5, 3.5], [1.5, 8.5, 2.5, 1.5], [0.5, 2.5, 7.5, 2.0]])
shown, y = [0, 1, 2], [22, 35, 18]
a, b = 1.3, np.array([0.05, 0.03, 0.06])
sampled = {"shape": shape.ravel().tolist(), "columns": 3, "outcomes": 4, "shown": shown, "data": y, "priorShape": a, "rate": b.tolist(),
           "fixed": gibbs(shape, shown, y, a, b, False), "free": gibbs(shape, shown, y, a, b, True)}

shares = []
for alpha, beta, n, s, r in [(12.0, 3.0, 40, 1.0, 0.02), (0.8, 0.5, 0, 1.0, 0.1), (0.8, 2.5, 7, 2.0, 0.5), (30.0, 60.0, 500, 0.5, 0.01), (3.0, 0.7, 15, 4.0, 1.5)]:
    a_, b_, n_, s_, r_ = (mp.mpf(x) for x in (alpha, beta, n, s, r))
    density = lambda e: e ** (a_ + n_ - 1) * (1 - e) ** (b_ - 1) * ((r_ + e) / (r_ + 1)) ** -(s_ + n_)
    moments = [mp.quad(lambda e: e**k * density(e), [0, 0.01, 0.2, 0.5, 0.8, 0.95, 1]) for k in (0, 1, 2)]
    mean = moments[1] / moments[0]
    shares.append({"a": alpha, "b": beta, "n": n, "priorShape": s, "rate": r, "mean": float(mean), "variance": float(moments[2] / moments[0] - mean**2)})
json.dump({"made": {"python": sys.version.split()[0], "numpy": np.__version__, "mpmath": mp.__version__, "seed": 17},
           "sampled": sampled, "shares": shares}, sys.stdout, indent=1)
