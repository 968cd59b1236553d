"""Moments of normalised scaled gammas, by mpmath quadrature of the defining integrals with 60 digits.

    python3 make.py > values.json

With M(t) = prod (1 + theta_l t)^(-a_l):  E[p_k] = int a_k theta_k / (1 + theta_k t) M dt,
E[p_k p_l] = int t a_k theta_k a_l theta_l / ((1 + theta_k t)(1 + theta_l t)) M dt,
E[p_k^2] = int t a_k (a_k + 1) theta_k^2 / (1 + theta_k t)^2 M dt; the variance is the plain difference, in 60 digits.
The substitution t = exp(u) and tanh-sinh panels have nothing in common with the rule under test.
"""
import json
import sys
import mpmath as mp

mp.mp.dps = 60

CASES = {
    "a Dirichlet": ([0.5, 3, 10.25, 1], [2, 2, 2, 2], [0, 2]),
    "a few effective entries": ([0.5, 3, 10], [1, 2, 0.5], [1]),
    "a total shape of 0.001": ([2e-4, 3e-4, 5e-4], [1, 10, 0.1], [0, 1]),
    "a total shape of 1e9": ([3e8, 6.9e8, 1e7, 0.5], [1, 1.3, 0.9, 1.1], [0, 3]),
    "scales over twelve decades": ([5, 0.5, 2, 40], [1e-6, 1e6, 1, 3e3], [0, 2]),
    "one outcome that holds nearly all": ([1e6, 0.5, 0.5, 7], [1, 2, 0.3, 1.5], [0]),
    "a heavy rare cell": ([2000, 1e-3, 300], [1, 1e5, 1.2], [1, 2]),
    "a cell of shape zero": ([12, 0, 4.5], [1, 3, 0.2], [0, 1]),
}


def integrals(a, theta):
    a = [mp.mpf(x) for x in a]
    theta = [mp.mpf(x) for x in theta]
    live = [l for l in range(len(a)) if a[l] > 0]
    total = sum(a)

    def survival(t):
        return mp.exp(-sum(a[l] * mp.log1p(theta[l] * t) for l in live))

    def g(k, t):
        return a[k] * theta[k] * t / (1 + theta[k] * t)

    q = sum(a[l] * theta[l] for l in live)
    low = mp.log(mp.mpf(10) ** -45 / max(q, max(theta)))
    # Where M is below 1e-45, or M is a pure power whose integral is closed.
    high = -mp.log(min(theta[l] for l in live)) + 105
    points = []
    u = low
    while u < high:
        points.append(u)
        if survival(mp.exp(u)) < mp.mpf(10) ** -60:
            break
        u += 3
    end = mp.exp(points[-1])

    def integral(f, at_infinity):
        body = mp.quad(lambda u: f(mp.exp(u)) * survival(mp.exp(u)), points)
        return body + at_infinity * survival(end) / total

    first = [integral(lambda t: g(k, t), a[k]) if a[k] else mp.mpf(0) for k in range(len(a))]
    second = [[mp.mpf(0)] * len(a) for _ in a]
    for k in live:
        for l in live:
            if l > k:
                continue
            factor = 1 + 1 / a[k] if k == l else 1
            second[k][l] = second[l][k] = integral(lambda t: g(k, t) * g(l, t) * factor, a[k] * a[l] * factor)
    return first, second


rows = []
for name, (a, theta, chosen) in CASES.items():
    first, second = integrals(a, theta)
    n = len(a)
    assert abs(sum(first) - 1) < mp.mpf(10) ** -35, (name, sum(first) - 1)
    cov = [[second[k][l] - first[k] * first[l] for l in range(n)] for k in range(n)]
    mean = sum(first[k] for k in chosen)
    variance = sum(cov[k][l] for k in chosen for l in chosen)
    rows.append(
        {
            "name": name,
            "shape": a,
            "scale": theta,
            "mean": [float(x) for x in first],
            "covariance": [float(x) for row in cov for x in row],
            "chosen": chosen,
            "chosenMean": float(mean),
            "chosenVariance": float(variance),
        }
    )
    print(name, file=sys.stderr)
print(json.dumps({"maker": "make.py", "mpmath": mp.__version__, "digits": mp.mp.dps, "cases": rows}, indent=1))
