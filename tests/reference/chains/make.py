"""Split-chain R-hat and effective draws, written out in NumPy by FFT, of chains kept with the values.

Run: python3 make.py > values.json
"""
import json
import sys

import numpy as np
import scipy

rng = np.random.default_rng(12)


def ar(n, phi, shift=0.0):
    x = np.empty(n)
    x[0] = rng.normal() / np.sqrt(1 - phi**2)
    for i in range(1, n):
        x[i] = phi * x[i - 1] + rng.normal()
    return np.round(x + shift, 6)


def diagnose(chains):
    split = np.concatenate([np.split(c, 2) for c in chains])
    m, n = split.shape
    w = split.var(1, ddof=1).mean()
    v = w * (n - 1) / n + split.mean(1).var(ddof=1)
    centred = split - split.mean(1, keepdims=True)
    f = np.fft.rfft(centred, 2 * n, axis=1)
    acov = np.fft.irfft(f * np.conj(f), axis=1)[:, :n] / n
    rho = 1 - (w - acov.mean(0)) / v
    rho[0] = 1
    pairs = rho[: n - n % 2].reshape(-1, 2).sum(1)
    stop = np.argmax(pairs <= 0) if (pairs <= 0).any() else len(pairs)
    tau = -1 + 2 * np.minimum.accumulate(pairs[:stop]).sum()
    return {"rhat": float(np.sqrt(v / w)), "effective": float(min(m * n / tau, m * n * np.log10(m * n)))}


cases = []
for name, chains in [("independent", [ar(200, 0.0) for _ in range(4)]), ("slow", [ar(400, 0.9) for _ in range(2)]),
                     ("antithetic", [ar(200, -0.5) for _ in range(3)]), ("apart", [ar(100, 0.2, s) for s in (0, 2, -1)])]:
    cases.append({"name": name, "chains": [c.tolist() for c in chains], **diagnose(chains)})
json.dump({"made": {"python": sys.version.split()[0], "numpy": np.__version__, "scipy": scipy.__version__, "seed": 12}, "cases": cases}, sys.stdout)
