"""Check values of the random generators and of the ziggurat's constants. Run: python3 make.py > values.json (needs cc, mpmath).

Threefry4x32-20: the three known answers of the authors' own file (Random123, `kat_vectors`, found quoted in a public test suite),
checked here by a second implementation, and further values made by it. xoshiro128++: the first ten words from the start
1, 2, 3, 4 as the public-domain C source of its authors gives them (quoted in the tests of the Rust crate rand_xoshiro), checked
by a compiled C program, and further values made by it. Ziggurat: tail and area for which 256 layers close, to 40 digits.
"""
import json, os, platform, subprocess, sys, tempfile
import mpmath
from mpmath import mpf

MASK = 0xFFFFFFFF
ROTATIONS = [(10, 26), (11, 21), (13, 27), (23, 5), (6, 20), (17, 11), (25, 10), (18, 20)]


def rotate(x, by):
    return ((x << by) | (x >> (32 - by))) & MASK


def threefry(key, counter, rounds=20):
    parity = 0x1BD11BDA
    for word in key:
        parity ^= word
    ks = list(key) + [parity]
    x = [(c + k) & MASK for c, k in zip(counter, ks)]
    for d in range(rounds):
        r0, r1 = ROTATIONS[d % 8]
        if d % 2 == 0:
            pairs = ((0, 1, r0), (2, 3, r1))
        else:
            pairs = ((0, 3, r0), (2, 1, r1))
        for i, j, r in pairs:
            x[i] = (x[i] + x[j]) & MASK
            x[j] = rotate(x[j], r) ^ x[i]
        if d % 4 == 3:
            s = d // 4 + 1
            x = [(x[i] + ks[(s + i) % 5]) & MASK for i in range(4)]
            x[3] = (x[3] + s) & MASK
    return x


PUBLISHED = [
    ([0] * 4, [0] * 4, [0x9C6CA96A, 0xE17EAE66, 0xFC10ECD4, 0x5256A7D8]),
    ([MASK] * 4, [MASK] * 4, [0x2A881696, 0x57012287, 0xF6C7446E, 0xA16A6732]),
    (
        [0xA4093822, 0x299F31D0, 0x082EFA98, 0xEC4E6C89],
        [0x243F6A88, 0x85A308D3, 0x13198A2E, 0x03707344],
        [0x59CD1DBB, 0xB8879579, 0x86B5D00C, 0xAC8B6D84],
    ),
]
XOSHIRO_PUBLISHED = [641, 1573767, 3222811527, 3517856514, 836907274, 4247214768, 3867114732, 1355841295, 495546011, 621204420]


def xoshiro(program, start, count):
    out = subprocess.run([program, *map(str, start), str(count)], check=True, capture_output=True, text=True)
    return [int(line) for line in out.stdout.split()]


def ziggurat(density, inverse, tail_area, guess, layers=256):
    def left_over(r):
        v = r * density(r) + tail_area(r)
        x = r
        for _ in range(layers - 2):
            x = inverse(v / x + density(x))
        return x * (1 - density(x)) - v

    r = mpmath.findroot(left_over, (guess * (1 - mpf(10) ** -12), guess * (1 + mpf(10) ** -12)), solver="secant", tol=1e-35)
    return {"tail": mpmath.nstr(r, 30), "area": mpmath.nstr(r * density(r) + tail_area(r), 30)}


def main():
    mpmath.mp.dps = 40
    for key, counter, words in PUBLISHED:
        assert threefry(key, counter) == words
    with tempfile.TemporaryDirectory() as folder:
        program = os.path.join(folder, "xoshiro")
        source = os.path.join(os.path.dirname(os.path.abspath(__file__)), "xoshiro128plusplus.c")
        subprocess.run(["cc", "-O1", "-o", program, source], check=True)
        assert xoshiro(program, [1, 2, 3, 4], 10) == XOSHIRO_PUBLISHED
        starts = [[1, 0, 0, 0], [0x9C6CA96A, 0xE17EAE66, 0xFC10ECD4, 0x5256A7D8]]
        made = [{"start": s, "words": xoshiro(program, s, 8), "thousandth": xoshiro(program, s, 1000)[-1]} for s in starts]
        # The stream of a place: key (seed low, seed high, purpose, 0), counter (a low, a high, b low, b high).
        places = []
        for seed, purpose, a, b in [(1, 6, 0, 0), (20261201, 6, 102, 31), (2**53 - 1, 6, 2**40 + 7, 2**33 + 1)]:
            start = threefry([seed & MASK, seed >> 32, purpose, 0], [a & MASK, a >> 32, b & MASK, b >> 32])
            places.append({"seed": seed, "purpose": purpose, "a": a, "b": b, "words": xoshiro(program, start, 4)})
    keys = [[7, 0, 1, 0], [0xDEADBEEF, 0x1FFFFF, 2, 0]]
    json.dump(
        {
            "made with": {"python": platform.python_version(), "mpmath": mpmath.__version__, "seed": "none: nothing random"},
            "threefry": {
                "published": [{"key": k, "counter": c, "words": w} for k, c, w in PUBLISHED],
                "made": [{"key": k, "counter": [j, 0, b, 0], "words": threefry(k, [j, 0, b, 0])} for k in keys for j in (0, 1, 99) for b in (0, 1)],
            },
            "xoshiro": {"published": [{"start": [1, 2, 3, 4], "words": XOSHIRO_PUBLISHED}], "made": made},
            "streams": places,
            "ziggurat": {
                "normal": ziggurat(lambda x: mpmath.exp(-x * x / 2), lambda y: mpmath.sqrt(-2 * mpmath.log(y)), lambda r: mpmath.sqrt(mpmath.pi / 2) * mpmath.erfc(r / mpmath.sqrt(2)), mpf("3.6541528853610088")),
                "exponential": ziggurat(lambda x: mpmath.exp(-x), lambda y: -mpmath.log(y), lambda r: mpmath.exp(-r), mpf("7.69711747013104972")),
            },
        },
        sys.stdout,
        indent=1,
    )
    print()


main()
