"""Check values of what Stirling's formula leaves out, of the deviance and of Poisson probabilities. Run: python3 make.py > values.json"""
import json, platform, sys
import mpmath
from mpmath import mp, mpf

mp.dps = 50
XS = ["1e-3", "0.02", "0.5", "1", "1.5", "7", "11.9", "12", "15", "100", "12345.5", "1e7", "1e12"]
PAIRS = [("3", "3"), ("3", "3.0000001"), ("1e7", "10000010"), ("1e7", "12000000"), ("1e7", "12300000"), ("5", "0.01"), ("0", "4"), ("1e-3", "900"), ("1e-5", "1e-290")]
POISSON = [("0", "0.3"), ("7", "3.25"), ("100", "100"), ("100", "20"), ("1000000", "1003000"), ("4", "1e-4"), ("1e12", "1000002000000")]


def left_out(x):
    return mpmath.loggamma(x) - ((x - mpf(1) / 2) * mpmath.log(x) - x + mpmath.log(2 * mpmath.pi) / 2)


def deviance(x, m):
    return (x * mpmath.log(x / m) if x else mpf(0)) + m - x


def exact(text):
    return mpf(float(text))


def show(value):
    return mpmath.nstr(value, 20)


json.dump(
    {
        "made with": {"python": platform.python_version(), "mpmath": mpmath.__version__, "seed": "none: nothing random"},
        "stirling": [{"x": float(x), "value": show(left_out(exact(x))), "logGamma": show(mpmath.loggamma(exact(x)))} for x in XS],
        "deviance": [{"x": float(x), "m": float(m), "value": show(deviance(exact(x), exact(m)))} for x, m in PAIRS],
        "poisson": [{"k": float(k), "mean": float(m), "log": show(exact(k) * mpmath.log(exact(m)) - exact(m) - mpmath.loggamma(exact(k) + 1))} for k, m in POISSON],
    },
    sys.stdout,
    indent=1,
)
print()
