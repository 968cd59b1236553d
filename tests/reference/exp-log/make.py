"""Exponentials and logarithms of doubles to 25 digits. Run: python3 make.py > values.json (seeded)"""
import json, platform, random, sys
import mpmath
from mpmath import mp, mpf

mp.dps = 40
random.seed(20261201)
EXP = [0.0, -0.0, 1.0, -1.0, 0.34657359027997264, -0.34657359027997264, 709.78, -708.39, -708.4, -720.5, -744.4, -745.1]
EXP += [random.uniform(-1.5, 1.5) for _ in range(400)] + [random.uniform(-745, 709) for _ in range(400)]
LOG = [1.0, 2.0, 0.5, 1.4142135623730951, 1.414213562373095, 1.4142, 0.99999999, 1.0000001, 5e-324, 1e-310, 2.2250738585072014e-308, 1.7e308]
LOG += [random.uniform(0.5, 1.7) for _ in range(400)] + [10 ** random.uniform(-307, 307) for _ in range(400)]
json.dump(
    {
        "made with": {"python": platform.python_version(), "mpmath": mpmath.__version__, "seed": 20261201},
        "exp": [{"x": x, "value": mpmath.nstr(mpmath.exp(mpf(x)), 25)} for x in EXP],
        "log": [{"x": x, "value": mpmath.nstr(mpmath.log(mpf(x)), 25)} for x in LOG],
    },
    sys.stdout,
)
print()
