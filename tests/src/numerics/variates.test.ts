import gammainc from '@stdlib/math-base-special-gammainc';
import { describe, expect, it } from 'vitest';
import { gammaVariate, logGammaVariate, SMALLEST_SHAPE } from '../../../src/numerics/gamma-variate';
import { normalCdf } from '../../../src/numerics/normal';
import { TRANSFORMED_FROM } from '../../../src/numerics/poisson-variate';
import { PURPOSE, streamOf } from '../../../src/numerics/random';
import { logPoisson } from '../../../src/numerics/stirling';
import { EXPONENTIAL_TAIL, NORMAL_TAIL } from '../../../src/numerics/ziggurat';
import { distance, LIMIT } from '../ensemble/kolmogorov';

const DRAWS = 200_000;
let place = 0;
const stream = (): ReturnType<typeof streamOf> => streamOf(20261201, PURPOSE.test, 1000 + place++, 0);
const drawn = (variate: () => number, count = DRAWS): Float64Array => Float64Array.from({ length: count }, variate);
const grid = (from: number, to: number): number[] =>
  Array.from({ length: 401 }, (_, i) => from + ((to - from) * i) / 400);

/** How far a count of events of probability `p` among `n` is from expectation, in standard errors. */
const deviations = (count: number, p: number, n = DRAWS): number =>
  Math.abs(count - n * p) / Math.sqrt(n * p * (1 - p));

describe('A uniform variate', () => {
  it('is uniform (Kolmogorov-Smirnov, 1e-6) and inside (0, 1)', () => {
    const source = stream();
    const values = drawn(() => source.uniform());
    expect(distance(values, (x) => x, grid(0, 1))).toBeLessThan(LIMIT);
    expect(values.every((u) => u > 0 && u < 1)).toBe(true);
  });

  it('has 53 random bits: each of the lowest 33 is set half of the time, within 5 standard errors', () => {
    const source = stream();
    const integers = Array.from({ length: 20_000 }, () => source.uniform() * 2 ** 53);
    expect(integers.every(Number.isInteger)).toBe(true);
    for (let bit = 0; bit < 33; bit++) {
      const set = integers.filter((k) => Math.floor(k / 2 ** bit) % 2 === 1).length;
      expect(deviations(set, 0.5, 20_000)).toBeLessThan(5);
    }
  });
});

describe('A normal variate', () => {
  const source = stream();
  const values = drawn(() => source.normal());

  it('is normal (Kolmogorov-Smirnov, 1e-6), with mean 0 and variance 1 within 5 standard errors', () => {
    expect(distance(values, normalCdf, grid(-5, 5))).toBeLessThan(LIMIT);
    const mean = values.reduce((a, b) => a + b) / DRAWS;
    const square = values.reduce((a, b) => a + b * b, 0) / DRAWS;
    expect(Math.abs(mean)).toBeLessThan(5 / Math.sqrt(DRAWS));
    expect(Math.abs(square - 1)).toBeLessThan(5 * Math.sqrt(2 / DRAWS));
  });

  it('has the tails of its law beyond the ziggurat, on both sides, and the law inside them', () => {
    const many = stream();
    const count = 2_000_000;
    let [above, below, far] = [0, 0, 0];
    for (let i = 0; i < count; i++) {
      const x = many.normal();
      if (x > NORMAL_TAIL) above++;
      if (x < -NORMAL_TAIL) below++;
      if (Math.abs(x) > 4.2) far++;
    }
    const tail = normalCdf(-NORMAL_TAIL);
    expect(deviations(above, tail, count)).toBeLessThan(5);
    expect(deviations(below, tail, count)).toBeLessThan(5);
    expect(deviations(far, 2 * normalCdf(-4.2), count)).toBeLessThan(5);
  });

  it('does not share bits between its layer and its place: places are uniform within every layer class', () => {
    // A generator that reuses bits shows in the low bits of the size: half of the mantissas are odd, within 5 standard errors.
    const view = new BigUint64Array(values.buffer);
    for (const bit of [0n, 1n, 2n, 3n]) {
      const set = view.reduce((n, bits) => n + Number((bits >> bit) & 1n), 0);
      expect(deviations(set, 0.5)).toBeLessThan(5);
    }
  });
});

describe('An exponential variate', () => {
  it('is exponential (Kolmogorov-Smirnov, 1e-6), above 0, with the tail of its law beyond the ziggurat', () => {
    const source = stream();
    const values = drawn(() => source.exponential());
    expect(distance(values, (x) => -Math.expm1(-x), grid(0.01, 12))).toBeLessThan(LIMIT);
    expect(values.every((x) => x > 0)).toBe(true);
    expect(deviations(values.filter((x) => x > EXPONENTIAL_TAIL).length, Math.exp(-EXPONENTIAL_TAIL))).toBeLessThan(5);
  });
});

describe('A gamma variate', () => {
  it.each([0.05, 0.5, 0.9999, 1, 1.0001, 1.5, 3, 40, 500])(
    'of shape %d follows the incomplete gamma function of @stdlib (Kolmogorov-Smirnov)',
    (shape) => {
      const source = stream();
      const values = drawn(() => source.gamma(shape), 100_000);
      const spread = Math.sqrt(shape);
      const points = grid(Math.max(shape * 1e-4, shape - 5 * spread), shape + 6 * spread + 4);
      expect(distance(values, (x) => gammainc(x, shape), points)).toBeLessThan(LIMIT);
    },
  );

  // From a shape of 1000 on @stdlib's incomplete gamma function is off by up to 1e-2 above the mean (checked against SciPy 1.10).
  it.each([1e3, 1e7, 1e12])(
    'of shape %d is normal in its cube root (Wilson & Hilferty 1931), as a law without approximation must be',
    (shape) => {
      const source = stream();
      const values = drawn(() => source.gamma(shape), 100_000).map((x) => {
        const root = Math.log(x / shape) / 3;
        return (Math.expm1(root) + 1 / (9 * shape)) * 3 * Math.sqrt(shape);
      });
      expect(distance(values, normalCdf, grid(-5, 5))).toBeLessThan(LIMIT);
    },
  );

  it.each([1e-12, 1e-3, 0.2, 1, 7])(
    'of shape %d has the law of its logarithm in `logGammaVariate`, where the variate underflows too',
    (shape) => {
      const source = stream();
      // P(ln X <= y) is near exp(a y) / Gamma(a + 1) for y far below 0: there a y is minus an exponential.
      const values = drawn(() => logGammaVariate(source, shape), 100_000);
      const below = values.filter((y) => y < -30).length;
      const law = Math.exp(-30 * shape) / gammaOfOnePlus(shape);
      if (shape < 0.5) expect(deviations(below, law, 100_000)).toBeLessThan(5);
      const points = grid(-3, Math.log(shape + 10));
      expect(distance(values, (y) => gammainc(Math.exp(y), shape), points)).toBeLessThan(LIMIT);
    },
  );

  it('is 0 for the shape 0, and refused for shapes that are none', () => {
    expect([gammaVariate(stream(), 0), logGammaVariate(stream(), 0)]).toEqual([0, -Infinity]);
    for (const bad of [-1, NaN, Infinity, SMALLEST_SHAPE * 0.99]) {
      expect(() => gammaVariate(stream(), bad)).toThrow(RangeError);
      expect(() => logGammaVariate(stream(), bad)).toThrow(RangeError);
    }
    expect(Number.isFinite(logGammaVariate(stream(), SMALLEST_SHAPE))).toBe(true);
  });

  it('rests on a bound of the logarithm that holds up to |t| = 1/2, and no longer at -0.65', () => {
    const excess = (t: number): number => Math.log1p(t) - t + t ** 2 / 2 - t ** 3 / 3 + t ** 4 / 2;
    for (const t of grid(-0.5, 0.5)) expect(excess(t)).toBeGreaterThanOrEqual(-1e-17);
    expect(excess(-0.65)).toBeLessThan(0);
  });
});

/** Gamma(1 + a) for small a, by its series to the second order (Abramowitz & Stegun 6.1.34); good to 1e-3 at 0.2. */
function gammaOfOnePlus(a: number): number {
  return 1 - 0.5772156649 * a + 0.9890559953 * a * a - 0.907479076 * a ** 3;
}

describe('A Poisson variate', () => {
  it.each([0.3, 4, TRANSFORMED_FROM * 0.999, TRANSFORMED_FROM, 37.5, 1000])(
    'of mean %d has the probabilities of its law (chi-square, 5 standard errors)',
    (mean) => {
      const source = stream();
      const count = 100_000;
      const spread = 4 * Math.sqrt(mean) + 1;
      const [from, to] = [Math.max(0, Math.floor(mean - spread)), Math.ceil(mean + spread)];
      const seen = new Float64Array(to - from + 1);
      for (let i = 0; i < count; i++) seen[Math.min(to, Math.max(from, source.poisson(mean))) - from]! += 1;
      const p = seen.map((_, i) => Math.exp(logPoisson(from + i, mean)));
      // The classes at the ends hold what lies beyond them.
      const rest = 1 - p.reduce((a, b) => a + b);
      let [chiSquare, classes] = [0, 0];
      p.slice(1, -1).forEach((probability, i) => {
        if (count * probability < 10) return;
        chiSquare += (seen[i + 1]! - count * probability) ** 2 / (count * probability);
        classes++;
      });
      expect(classes).toBeGreaterThan(1);
      expect(chiSquare).toBeLessThan(classes + 5 * Math.sqrt(2 * classes) + 10);
      expect(rest).toBeLessThan(1e-3);
    },
  );

  it.each([1e-6, 250, 1e9])('of mean %d has its mean and variance, within 5 standard errors', (mean) => {
    const source = stream();
    const count = 50_000;
    const values = drawn(() => source.poisson(mean), count);
    const found = values.reduce((a, b) => a + (b - mean), 0) / count;
    const variance = values.reduce((a, b) => a + (b - mean) ** 2, 0) / count;
    expect(Math.abs(found)).toBeLessThan(5 * Math.sqrt(mean / count) + 1 / count);
    expect(Math.abs(variance - mean)).toBeLessThan(5 * Math.sqrt((2 * mean * mean + mean) / count) + 1 / count);
  });

  it('is 0 for mean 0, and refused for means that are none', () => {
    expect(stream().poisson(0)).toBe(0);
    for (const bad of [-1, NaN, Infinity, 2 ** 53]) expect(() => stream().poisson(bad)).toThrow(RangeError);
  });
});
