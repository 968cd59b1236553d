"""The adaptive rule of JCGM 101:2008, 7.9.4, written out plainly in NumPy, on blocks of known numbers.

Blocks are draws rounded to eight decimals, kept with the values.
Run: python3 make.py > values.json
"""
import json
import sys
from math import floor, log10

import numpy as np
import scipy
from scipy.stats import beta, norm

M, CREDIBILITY, DIGITS = 180, 0.95, 1
rng = np.random.default_rng(6)
laws = [beta(2, 99), beta(0.5, 35), norm(0.3, 0.02), beta(500, 100)]
drawn = [np.round(np.stack([law.rvs(M, random_state=rng) for law in laws], axis=1), 8) for _ in range(12)]


def tolerance(u):
    l = floor(log10(u)) - (DIGITS - 1)
    if round(u / 10**l) == 10**DIGITS:
        l += 1
    return 0.5 * 10**l


found = {name: [] for name in ("mean", "standard uncertainty", "lower end", "upper end")}
every, history = [], []
for h in range(1, 9):
    x = drawn[h - 1]
    every.append(x)
    found["mean"].append(x.mean(0))
    found["standard uncertainty"].append(x.std(0, ddof=1))
    y = np.sort(x, axis=0)
    q = floor(CREDIBILITY * M + 0.5)
    r = (M - q) // 2 if (M - q) % 2 == 0 else (M - q + 1) // 2
    found["lower end"].append(y[r - 1])
    found["upper end"].append(y[r + q - 1])
    if h == 1:
        continue
    delta = np.array([tolerance(u) for u in np.concatenate(every).std(0, ddof=1)])
    ratio = {name: 2 * np.sqrt(np.var(v, axis=0, ddof=1) / h) / delta for name, v in found.items()}
    worst = max(((r[o], name, o) for name, r in ratio.items() for o in range(len(laws))))
    history.append({"blocks": h, "excess": float(worst[0]), "quantity": worst[1], "output": int(worst[2])})
blocks = [x.ravel().tolist() for x in drawn[:8]]
json.dump({"made": {"python": sys.version.split()[0], "numpy": np.__version__, "scipy": scipy.__version__}, "replicas": M,
           "credibility": CREDIBILITY, "digits": DIGITS, "outputs": len(laws), "blocks": blocks, "history": history[:7]}, sys.stdout)
