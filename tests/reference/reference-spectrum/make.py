"""Reference spectra binned by numerical integration (mpmath at 40 digits), apart from the program's closed forms.

Run: python3 make.py > values.json
"""
import json
import sys

import mpmath as mp

mp.mp.dps = 40


def binned(density, edges, start, stop, events, log=False, breaks=()):
    """Expected events and lower-half shares of below, the bins, above, for a density cut to [start, stop]."""
    def area(a, b):
        a, b = max(mp.mpf(a), start), min(mp.mpf(b), stop)
        if b <= a:
            return mp.mpf(0)
        return mp.quad(density, [a, *[x for x in breaks if a < x < b], b])

    bounds = [start if start < edges[0] else edges[0], *edges, stop if stop > edges[-1] else edges[-1]]
    pieces = [area(a, b) for a, b in zip(bounds, bounds[1:])]
    total = mp.fsum(pieces)
    halves = []
    for a, b in zip(edges, edges[1:]):
        mid = mp.sqrt(mp.mpf(a) * b) if log else (mp.mpf(a) + b) / 2
        whole = area(a, b)
        halves.append(area(a, mid) / whole if whole > 0 else mp.mpf(1))
    return {
        "contents": [float(events * piece / total) for piece in pieces],
        "lowerShares": [1.0, *[float(x) for x in halves], 1.0],
    }


linear = [20, 30, 50, 55, 120]
log = [1, 3, 10, 100]
table = [(0, 10, 5.0), (10, 25, 60.0), (25, 28, 6.0), (40, 130, 9.0)]


def stepped(x):
    return mp.fsum(c / mp.mpf(hi - lo) for lo, hi, c in table if lo <= x < hi)


m = mp.mpf
cases = [
    {"name": "flat", "edges": linear, "spacing": "linear", "observed": [5, 150],
     "reference": {"kind": "flat", "events": 1000},
     **binned(lambda x: m(1), linear, m(5), m(150), 1000)},
    {"name": "power law of index -2.7", "edges": linear, "spacing": "linear", "observed": [5, 150],
     "reference": {"kind": "powerLaw", "index": -2.7, "events": 30000},
     **binned(lambda x: x ** m("-2.7"), linear, m(5), m(150), 30000)},
    {"name": "power law of index -1", "edges": log, "spacing": "log", "observed": [0.5, 300],
     "reference": {"kind": "powerLaw", "index": -1, "events": 500},
     **binned(lambda x: 1 / x, log, m("0.5"), m(300), 500, log=True)},
    {"name": "power law beside index -1", "edges": log, "spacing": "log", "observed": [0.5, 300],
     "reference": {"kind": "powerLaw", "index": -1.000000001, "events": 500},
     **binned(lambda x: x ** m(-1.000000001), log, m("0.5"), m(300), 500, log=True)},
    {"name": "rising power law", "edges": linear, "spacing": "linear", "observed": None,
     "reference": {"kind": "powerLaw", "index": 3.5, "from": 25, "to": 100, "events": 7},
     **binned(lambda x: x ** m("3.5"), linear, m(25), m(100), 7)},
    {"name": "steep power law", "edges": log, "spacing": "log", "observed": None,
     "reference": {"kind": "powerLaw", "index": 250, "events": 10},
     **binned(lambda x: (x / 100) ** 250, log, m(1), m(100), 10, log=True, breaks=(80, 90, 95, 98, 99))},
    {"name": "exponential of scale 40", "edges": linear, "spacing": "linear", "observed": [0, 400],
     "reference": {"kind": "exponential", "scale": 40, "events": 30000},
     **binned(lambda x: mp.exp(-x / 40), linear, m(0), m(400), 30000, breaks=(200, 300))},
    {"name": "table by area", "edges": linear, "spacing": "linear", "observed": [19, 121],
     "reference": {"kind": "table", "file": "s.csv", "events": 80},
     "table": "lo,hi,content\n" + "".join(f"{a},{b},{c}\n" for a, b, c in table),
     **binned(stepped, linear, m(0), m(130), 80, breaks=(10, 25, 28, 40))},
]
json.dump({"made": {"python": sys.version.split()[0], "mpmath": mp.__version__}, "cases": cases}, sys.stdout, indent=1)
