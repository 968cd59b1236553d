"""Replicas drawn by a second implementation, in Python, from the description of the method alone: integers, IEEE doubles, and the
exponential and logarithm by the same series. Run: python3 make.py > values.json (no packages)

Kept: the first three replicas of every set, and the SHA-256 of all 32 of block 7 of every set, little-endian doubles in C order.
"""
import hashlib, json, math, platform, struct, sys

MASK = 0xFFFFFFFF
ROTATIONS = [(10, 26), (11, 21), (13, 27), (23, 5), (6, 20), (17, 11), (25, 10), (18, 20)]
LN2_HIGH, LN2_LOW, LN2 = 0.6931471803691238, 1.9082149292705877e-10, 0.6931471805599453


def rotate(x, by):
    return ((x << by) | (x >> (32 - by))) & MASK


def threefry(key, counter):
    ks = list(key) + [0x1BD11BDA ^ key[0] ^ key[1] ^ key[2] ^ key[3]]
    x = [(c + k) & MASK for c, k in zip(counter, ks)]
    for d in range(20):
        r0, r1 = ROTATIONS[d % 8]
        for i, j, r in ((0, 1, r0), (2, 3, r1)) if d % 2 == 0 else ((0, 3, r0), (2, 1, r1)):
            x[i] = (x[i] + x[j]) & MASK
            x[j] = rotate(x[j], r) ^ x[i]
        if d % 4 == 3:
            s = d // 4 + 1
            x = [(x[i] + ks[(s + i) % 5]) & MASK for i in range(4)]
            x[3] = (x[3] + s) & MASK
    return x


def exp(x):
    k = math.floor(x / LN2 + 0.5)
    if x < -746:
        return 0.0
    r = x - k * LN2_HIGH - k * LN2_LOW
    q = r * r
    high = 1 / 23950080 + q * (-691 / 653837184000 + q / 37362124800)
    rest = q * (1 / 6 + q * (-1 / 360 + q * (1 / 15120 + q * (-1 / 604800 + q * high))))
    fraction = 1 + (2 * r) / (2 + rest - r)
    half = k >> 1
    return fraction * 2.0**half * 2.0 ** (k - half)


def log(x):
    fraction, exponent = math.frexp(x)  # in [1/2, 1)
    fraction, exponent = fraction * 2, exponent - 1
    if struct.unpack("<q", struct.pack("<d", fraction))[0] >> 32 & 0xFFFFF >= 0x6A09F:
        fraction, exponent = fraction / 2, exponent + 1
    f = fraction - 1
    s = f / (2 + f)
    q = s * s
    high = 2 / 13 + q * (2 / 15 + q * (2 / 17 + q * (2 / 19 + q * (2 / 21 + (q * 2) / 23))))
    rest = q * (2 / 3 + q * (2 / 5 + q * (2 / 7 + q * (2 / 9 + q * (2 / 11 + q * high)))))
    half = 0.5 * f * f
    return exponent * LN2_HIGH - (half - (s * (half + rest) + exponent * LN2_LOW) - f)


class Layers:
    def __init__(self, tail, area, density, inverse):
        self.tail, self.density = tail, density
        self.edge = [area / density(tail), tail]
        while len(self.edge) < 256:
            self.edge.append(inverse(area / self.edge[-1] + density(self.edge[-1])))
        self.edge.append(0.0)
        self.height = [density(x) for x in self.edge]


NORMAL = Layers(3.6541528853610088, 0.0049286732339746554, lambda x: exp((-x * x) / 2), lambda y: math.sqrt(-2 * log(y)))
EXPONENTIAL = Layers(7.69711747013105, 0.003949659822581557, lambda x: exp(-x), lambda y: -log(y))


class Stream:
    def __init__(self, seed, purpose, a, b):
        low_high = lambda v: [v & MASK, v >> 32]
        self.s = threefry(low_high(seed) + [purpose, 0], low_high(a) + low_high(b))

    def word(self):
        s = self.s
        result = (rotate((s[0] + s[3]) & MASK, 7) + s[0]) & MASK
        t = (s[1] << 9) & MASK
        s[2] ^= s[0]
        s[3] ^= s[1]
        s[1] ^= s[2]
        s[0] ^= s[3]
        s[2] ^= t
        s[3] = rotate(s[3], 11)
        return result

    def uniform(self):
        while True:
            low, high = self.word(), self.word()
            if high or low >> 11:
                return (high * 2**21 + (low >> 11)) * 2.0**-53

    def place(self, layers):
        """A place in a layer, whether it is decided, the layer, and the sign that the first word carries."""
        first, second = self.word(), self.word()
        layer = first & 255
        x = (float(second * 2**21 + (first >> 11)) + 0.5) * (layers.edge[layer] * 2.0**-53)
        return x, x < layers.edge[layer + 1], layer, -1 if first >> 8 & 1 else 1

    def under(self, layers, layer, x):
        h = layers.height
        return h[layer] + self.uniform() * (h[layer + 1] - h[layer]) < layers.density(x)

    def half_normal(self):
        x, decided, layer, _ = self.place(NORMAL)
        return x if decided else self.half_normal_rest(layer, x)

    def half_normal_rest(self, layer, x):
        if layer == 0:
            while True:
                beyond = self.exponential() / NORMAL.tail
                if 2 * self.exponential() > beyond * beyond:
                    return NORMAL.tail + beyond
        return x if self.under(NORMAL, layer, x) else self.half_normal()

    def normal(self):
        x, decided, layer, sign = self.place(NORMAL)
        return sign * (x if decided else self.half_normal_rest(layer, x))

    def exponential(self):
        x, decided, layer, _ = self.place(EXPONENTIAL)
        return x if decided else self.exponential_rest(layer, x)

    def exponential_rest(self, layer, x):
        if layer == 0:
            return EXPONENTIAL.tail + self.exponential()
        return x if self.under(EXPONENTIAL, layer, x) else self.exponential()

    def many(self, count, layers, rest):
        """All places first, then what is undecided, in order."""
        places = [self.place(layers) for _ in range(count)]
        return [(x if decided else rest(layer, x), sign) for x, decided, layer, sign in places]


def gamma_constants(shape):
    offset = (shape + 1 if shape < 1 else shape) - 1 / 3
    return offset, 1 / math.sqrt(9 * offset)


def inside(u, offset, t):
    return t * t <= 0.25 and (u + 1) * 2.0**-32 < 1 - 1.5 * offset * (t * t) * (t * t)


def accepted(stream, u, offset, t):
    if t <= -1:
        return False
    uniform = (u + (stream.word() + 0.5) * 2.0**-32) * 2.0**-32
    if abs(t) > 0.25:
        bound = log(1 + t) - t * (1 - t * (0.5 - t / 3))
    else:
        power = -t * t * t * t
        bound, k = power / 4, 5
        while True:
            power *= -t
            if bound + power / k == bound:
                break
            bound, k = bound + power / k, k + 1
    return log(uniform) < 3 * offset * bound


def gamma_above(stream, offset, slope):
    while True:
        t = slope * stream.normal()
        u = stream.word()
        if inside(u, offset, t) or accepted(stream, u, offset, t):
            return offset * ((1 + t) * (1 + t) * (1 + t))


def gammas_above(stream, shapes):
    constants = [gamma_constants(a) for a in shapes]
    normals = [sign * x for x, sign in stream.many(len(shapes), NORMAL, stream.half_normal_rest)]
    words = [stream.word() for _ in shapes]
    out = []
    for (offset, slope), x, u in zip(constants, normals, words):
        t = slope * x
        good = inside(u, offset, t) or accepted(stream, u, offset, t)
        out.append(offset * ((1 + t) * (1 + t) * (1 + t)) if good else gamma_above(stream, offset, slope))
    return out


def column(stream, shape, scale, in_logs):
    kinds = [lambda a: a == 0.5, lambda a: a == 1, lambda a: a > 1, lambda a: 0 < a < 1 and a != 0.5]
    groups = [[k for k, a in enumerate(shape) if kind(a)] for kind in kinds]
    cells = sum(groups, [])
    if scale:
        scale = [s / max(scale[k] for k in cells) for s in scale]
    if in_logs:
        logs = []
        for k in cells:
            value = log(gamma_above(stream, *gamma_constants(shape[k])))
            if shape[k] < 1:
                value -= stream.exponential() / shape[k]
            logs.append(value + (log(scale[k]) if scale else 0))
        drawn = [exp(v - max(logs)) for v in logs]
    else:
        drawn = [0.5 * x * x for x, _ in stream.many(len(groups[0]), NORMAL, stream.half_normal_rest)]
        drawn += [x for x, _ in stream.many(len(groups[1]), EXPONENTIAL, stream.exponential_rest)]
        others = groups[2] + groups[3]
        drawn += gammas_above(stream, [shape[k] for k in others])
        boosts = [x for x, _ in stream.many(len(groups[3]), EXPONENTIAL, stream.exponential_rest)]
        for i, (k, e) in enumerate(zip(groups[3], boosts)):
            drawn[len(cells) - len(boosts) + i] *= exp(-e * (1 / shape[k]))
        if scale:
            drawn = [x * scale[k] for x, k in zip(drawn, cells)]
    pairs = len(drawn) - len(drawn) % 2
    even = odd = 0.0
    for i in range(0, pairs, 2):
        even, odd = even + drawn[i], odd + drawn[i + 1]
    unit = 1 / (even + odd + (drawn[pairs] if pairs < len(drawn) else 0))
    out = [0.0] * len(shape)
    for k, x in zip(cells, drawn):
        out[k] = x * unit
    return out


def block(columns, seed, number, replicas=32):
    drawn = []
    for j, (shape, scale, in_logs) in enumerate(columns):
        stream = Stream(seed, 1, j, number)
        drawn.append([column(stream, shape, scale, in_logs) for _ in range(replicas)])
    return [[drawn[j][r] for j in range(len(columns))] for r in range(replicas)]


BANDS = [[0, 3, 40, 21, 7, 1, 0, 0, 0], [2, 0, 9, 38, 17, 4, 0, 1, 0], [0, 0, 0, 1, 12, 55, 19, 3, 2]]
SETS = [
    ("counts and a pseudo-count of 1/2", [([n + 0.5 for n in band], None, False) for band in BANDS]),
    ("counts and a flat prior", [([n + 1.0 for n in band], None, False) for band in BANDS]),
    ("shapes of every kind, one outcome impossible", [([0.3, 2.5, 0.0, 1e-5, 0.5, 1.0, 1e9, 0.75], None, False)]),
    ("tiny shapes, in logarithms", [([1e-5, 3e-4, 0.0, 0.05], None, True)]),
    ("weighted", [([3.5, 0.5, 12.25, 0.7, 1.0], [2.0, 1.0, 0.25, 3.0, 0.1], False)]),
    ("weighted, in logarithms", [([0.01, 0.02], [1.0, 7.5], True)]),
]
SEED, NUMBER = 20261201, 7

made = []
for name, columns in SETS:
    drawn = block(columns, SEED, NUMBER)
    flat = [p for replica in drawn for shares in replica for p in shares]
    made.append(
        {
            "name": name,
            "shape": [c[0] for c in columns],
            "scale": [c[1] for c in columns] if columns[0][1] else None,
            "first": [p for replica in drawn[:3] for shares in replica for p in shares],
            "sha256": hashlib.sha256(struct.pack(f"<{len(flat)}d", *flat)).hexdigest(),
        }
    )
json.dump({"made with": {"python": platform.python_version()}, "seed": SEED, "block": NUMBER, "sets": made}, sys.stdout)
print()
