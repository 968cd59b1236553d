"""Gamma quantiles at 40 digits by mpmath: python3 make.py > expected.json"""
import json
import sys

import mpmath as mp

mp.mp.dps = 60


def quantile(p, a):
    """Bisection on the regularised incomplete gamma function, then Newton, all at 60 digits."""
    a, p = mp.mpf(a), mp.mpf(p)
    upper_tail = p > mp.mpf("0.5")

    def excess(x):
        if upper_tail:
            return (1 - p) - mp.gammainc(a, x, mp.inf, regularized=True)
        return mp.gammainc(a, 0, x, regularized=True) - p

    low, high = mp.mpf(10) ** -400, a + 60 * mp.sqrt(a) + 200
    for _ in range(200):
        middle = mp.sqrt(low * high) if low < high / 4 else (low + high) / 2
        if excess(middle) > 0:
            high = middle
        else:
            low = middle
        if (high - low) < high * mp.mpf(10) ** -25:
            break
    return (low + high) / 2


cases = []
for a in ["0.1", "0.5", "1", "1.5", "2.5", "7.5", "30.5", "100.5", "1000.5", "12345.5"]:
    for p in ["1e-12", "1e-6", "0.025", "0.16", "0.5", "0.84", "0.95", "0.975", "0.999999"]:
        cases.append([float(p), float(a), float(quantile(float(p), float(a)))])
json.dump({"maker": "tests/reference/gamma-quantile/make.py", "versions": {"mpmath": mp.__version__}, "cases": cases}, sys.stdout)
