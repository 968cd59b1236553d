"""Check values of the Beta distribution to 40 digits. Run: python3 make.py > values.json (mpmath, SciPy; about ten minutes).

For shapes a, b and a tail probability t, lower or upper, `x` is the quantile and `y = 1 - x` its complement, to 20 digits: the solution
of I_x(a, b) = t, or of 1 - I_x(a, b) = t, where t is the decimal as it stands. The regularised incomplete beta function is the continued
fraction DLMF 8.17.22, on the side of the mean where it converges fast, at 60 digits; every 10th value is checked by the series
with positive terms DLMF 8.17.8 where that is short, and by mpmath's own `betainc` where that is quick. The root is Newton's on ln t in ln(x / y),
from SciPy's quantile or by bisection. Quantiles below 1e-300 are left out. `lower` and `upper` are the tails at the double nearest to x.
"""
import json, platform, sys
import mpmath
import scipy
from mpmath import mp, mpf
from scipy import special

mp.dps = 60
SHAPES = ["1e-3", "1e-2", "0.1", "0.5", "1", "2.5", "10", "103.5", "1e3", "1e5", "1e7"]
TAILS = ["1e-300", "1e-100", "1e-20", "1e-10", "1e-3", "0.025", "0.16", "0.5", "0.84", "0.975"]


def log_beta(a, b):
    return mpmath.loggamma(a) + mpmath.loggamma(b) - mpmath.loggamma(a + b)


def fraction(a, b, x, y):
    """I_x(a, b) for x at or below the mean or so: DLMF 8.17.22 by the modified method of Lentz."""
    tiny = mpf(10) ** -500
    c, d = mpf(1), 1 - (a + b) * x / (a + 1)
    d = 1 / (d if d else tiny)
    h, m, stop = d, 1, mpf(10) ** -(mp.dps - 12)
    while True:
        even = m * (b - m) * x / ((a + 2 * m - 1) * (a + 2 * m))
        d, c = 1 / (1 + even * d), 1 + even / c
        h *= d * c
        odd = -(a + m) * (a + b + m) * x / ((a + 2 * m) * (a + 2 * m + 1))
        d, c = 1 / (1 + odd * d), 1 + odd / c
        h *= d * c
        if abs(d * c - 1) < stop:
            return h * mpmath.exp(a * mpmath.log(x) + b * mpmath.log(y) - log_beta(a, b)) / a
        m += 1


def series(a, b, x, y, most=20000):
    """The same by DLMF 8.17.8, or None where it would be long."""
    term = total = mpf(1)
    for n in range(most):
        term = term * x * (a + b + n) / (a + 1 + n)
        total += term
        ratio = x * (a + b + n + 1) / (a + 2 + n)
        if ratio < 1 and term / (1 - ratio) < total * mpf(10) ** -48:
            return total * mpmath.exp(a * mpmath.log(x) + b * mpmath.log(y) - log_beta(a, b)) / a
    return None


def tails(a, b, x, y):
    """Lower and upper tail; the larger is one minus the smaller, so that the smaller keeps its digits."""
    if x <= (a + 1) / (a + b + 2):
        lower = fraction(a, b, x, y)
        return lower, 1 - lower
    upper = fraction(b, a, y, x)
    return 1 - upper, upper


def tail_of(a, b, x, y, side):
    lower, upper = tails(a, b, x, y)
    small = lower if side == "lower" else upper
    return small


def start(a, b, t, side):
    """A first guess of ln(x / y): SciPy's where it is near enough, else by bisection."""
    fa, fb, ft = float(a), float(b), float(t)
    x, y = (special.betaincinv(fa, fb, ft), special.betaincinv(fb, fa, 1 - ft)) if side == "lower" else (special.betaincinv(fa, fb, 1 - ft), special.betaincinv(fb, fa, ft))
    with mpmath.workdps(18):
        if 0 < x < 1 and 0 < y < 1:
            guess = mpmath.log(x) - mpmath.log(y)
            e = mpmath.exp(guess)
            v = tail_of(a, b, e / (1 + e), 1 / (1 + e), side)
            if v > 0 and abs(mpmath.log(v / t)) < mpf(10) ** -3:
                return guess
        lo, hi = mpf(-760), mpf(760)
        for _ in range(60):
            mid = (lo + hi) / 2
            e = mpmath.exp(mid)
            v = tail_of(a, b, e / (1 + e), 1 / (1 + e), side)
            lo, hi = (mid, hi) if (v < t) == (side == "lower") else (lo, mid)
            if hi - lo < mpf(2) ** -26 * (1 + abs(mid)):
                break
        return (lo + hi) / 2


def quantile(a, b, t, side):
    logit = start(a, b, t, side)
    lb = log_beta(a, b)
    for _ in range(12):
        e = mpmath.exp(logit)
        x, y = e / (1 + e), 1 / (1 + e)
        v = tail_of(a, b, x, y, side)
        # d tail / d logit = +- x^a y^b / B; a step on ln(tail).
        slope = mpmath.exp(a * mpmath.log(x) + b * mpmath.log(y) - lb) / v
        step = (mpmath.log(v) - mpmath.log(t)) / slope
        logit += -step if side == "lower" else step
        if abs(step) < mpf(10) ** -32 * (1 + abs(logit)):
            break
    else:
        raise ArithmeticError((a, b, t, side))
    e = mpmath.exp(logit)
    return e / (1 + e), 1 / (1 + e)


def check(a, b, x, y):
    """The continued fraction against the series and against mpmath.betainc, where those are quick."""
    low = x <= (a + 1) / (a + b + 2)
    p, q, u, v = (a, b, x, y) if low else (b, a, y, x)
    value, other = fraction(p, q, u, v), series(p, q, u, v)
    if other is not None:
        assert abs(other / value - 1) < mpf(10) ** -40, (a, b, x)
    if max(a, b) <= 1000:
        with mpmath.workdps(45):
            own = mpmath.betainc(p, q, 0, u, regularized=True)
        assert abs(own / value - 1) < mpf(10) ** -25, (a, b, x, own, value)
    return other is not None


def main():
    cases, checked = [], 0
    for a in SHAPES:
        for b in SHAPES:
            for t in TAILS:
                for side in ("lower", "upper"):
                    x, y = quantile(mpf(a), mpf(b), mpf(t), side)
                    if min(x, y) < mpf("1e-300"):
                        continue
                    if len(cases) % 10 == 0:
                        checked += check(mpf(a), mpf(b), x, y)
                    lower, upper = tails(mpf(a), mpf(b), mpf(float(x)), 1 - mpf(float(x))) if float(x) < 1 else (1, 0)
                    cases.append(
                        {
                            "a": float(a),
                            "b": float(b),
                            "tail": float(t),
                            "side": side,
                            "x": mpmath.nstr(x, 20),
                            "y": mpmath.nstr(y, 20),
                            "lower": mpmath.nstr(lower, 20),
                            "upper": mpmath.nstr(upper, 20),
                        }
                    )
            print(a, b, len(cases), file=sys.stderr, flush=True)
    versions = {"python": platform.python_version(), "mpmath": mpmath.__version__, "scipy": scipy.__version__, "seed": "none: nothing random"}
    json.dump({"made with": versions, "checked by the series": checked, "cases": cases}, sys.stdout)
    print()


if __name__ == "__main__":
    main()
