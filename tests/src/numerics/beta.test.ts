import betaCdfOfStdlib from '@stdlib/stats-base-dists-beta-cdf';
import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import { betaCdf, betaCdfUpper, betaQuantile, betaQuantileUpper, FAR_TAIL } from '../../../src/numerics/beta';
import { reference, relativeMiss } from './reference';

interface Case {
  a: number;
  b: number;
  tail: number;
  side: 'lower' | 'upper';
  x: string;
  lower: string;
  upper: string;
}
/** mpmath at 60 digits; `lower` and `upper` at the double nearest to `x`. */
const { cases } = reference<{ cases: Case[] }>('beta');

const shape = fc.double({ min: -3, max: 7, noNaN: true }).map((power) => 10 ** power);
const probability = fc.double({ min: 1e-12, max: 1, noNaN: true });

describe('The Beta quantile', () => {
  it('has a set of check values that covers shapes from 1e-3 to 1e7 and tails from 1e-300 on both sides', () => {
    const shapes = new Set(cases.flatMap(({ a, b }) => [a, b]));
    expect([Math.min(...shapes), Math.max(...shapes), shapes.size]).toEqual([1e-3, 1e7, 11]);
    expect(cases.filter(({ tail }) => tail === 1e-300).length).toBeGreaterThan(100);
    expect(cases.length).toBeGreaterThan(2000);
  });

  it('is right to 1e-10 relative at every one of them (mpmath, 40 digits)', () => {
    const misses = cases.map(({ a, b, tail, side, x }) => {
      const found = side === 'lower' ? betaQuantile(tail, a, b) : betaQuantileUpper(tail, a, b);
      return relativeMiss({ a, b, tail, side }, found, Number(x), 1e-10);
    });
    expect(misses.filter(Boolean)).toEqual([]);
  });

  it('is right to 1e-10 where @stdlib alone is not: at large integer shapes, by its own distribution function', () => {
    for (const [q, a, b] of [
      [0.3714620672320498, 2, 9933719],
      [0.3447021058766595, 2, 8787957],
    ] as const) {
      const x = betaQuantileUpper(q, a, b);
      // For a = 2 the upper tail is (1 - x)^b (1 + b x).
      const tail = Math.exp(b * Math.log1p(-x)) * (1 + b * x);
      const density = b * (b + 1) * x * Math.exp((b - 1) * Math.log1p(-x));
      expect(Math.abs(tail - q) / (density * x)).toBeLessThan(1e-12);
    }
  });

  it('is continuous where the far tails begin', () => {
    for (const [a, b] of [
      [0.5, 1000],
      [2.5, 10],
      [20, 3000],
      [1e5, 1e7],
    ] as const) {
      for (const quantile of [betaQuantile, betaQuantileUpper]) {
        const [far, near] = [quantile(FAR_TAIL * (1 - 1e-13), a, b), quantile(FAR_TAIL * (1 + 1e-13), a, b)];
        expect(Math.abs(near / far - 1)).toBeLessThan(1e-11);
      }
    }
  });

  it('rises with the probability, and the upper one falls', () => {
    fc.assert(
      fc.property(shape, shape, probability, probability, (a, b, p, q) => {
        const [less, more] = p < q ? [p, q] : [q, p];
        expect(betaQuantile(less, a, b)).toBeLessThanOrEqual(betaQuantile(more, a, b) * (1 + 1e-12));
        expect(betaQuantileUpper(more, a, b)).toBeLessThanOrEqual(betaQuantileUpper(less, a, b) * (1 + 1e-12));
      }),
      { numRuns: 500, seed: 1 },
    );
  });

  it('is undone by the distribution function wherever the quantile is a number that can tell', () => {
    fc.assert(
      fc.property(shape, shape, probability, (a, b, p) => {
        const x = betaQuantile(p, a, b);
        fc.pre(x > 1e-300 && x < 0.999);
        const width = Math.min(1, Math.abs(betaCdf(x * (1 + 1e-10), a, b) - betaCdf(x * (1 - 1e-10), a, b)));
        expect(Math.abs(betaCdf(x, a, b) - p)).toBeLessThanOrEqual(width + 1e-14);
      }),
      { numRuns: 500, seed: 2 },
    );
  });

  it('is the end itself for a shape of 0, and at the probabilities 0 and 1', () => {
    for (const p of [0, 0.3, 1]) {
      expect([betaQuantile(p, 0, 3), betaQuantileUpper(p, 0, 3)]).toEqual([0, 0]);
      expect([betaQuantile(p, 3, 0), betaQuantileUpper(p, 3, 0)]).toEqual([1, 1]);
    }
    expect([betaQuantile(0, 2, 3), betaQuantile(1, 2, 3)]).toEqual([0, 1]);
    expect([betaQuantileUpper(0, 2, 3), betaQuantileUpper(1, 2, 3)]).toEqual([1, 0]);
  });

  it('is an end for shapes below 1e-12, and a number inside above', () => {
    expect(betaQuantileUpper(1e-14, 0.9e-12, 5)).toBe(1);
    expect(betaQuantileUpper(0.3, 0.9e-12, 5)).toBe(0);
    expect(betaQuantileUpper(1e-14, 1.1e-12, 5)).toBeGreaterThan(0);
    expect(betaQuantileUpper(1e-14, 1.1e-12, 5)).toBeLessThan(1);
    expect([0.1, 0.9].map((p) => betaQuantile(p, 1e-300, 1e-300))).toEqual([0, 1]);
  });

  it('underflows to 0, and never to NaN, for whatever shapes', () => {
    expect(betaQuantile(1e-10, 1e-3, 5)).toBe(0);
    expect(betaQuantile(1e-250, 1e-3, 5)).toBe(0);
    const any = fc.double({ min: -300, max: 12, noNaN: true }).map((power) => 10 ** power);
    const tail = fc.double({ min: -300, max: 0, noNaN: true }).map((power) => 10 ** power);
    fc.assert(
      fc.property(any, any, tail, (a, b, p) => {
        for (const x of [betaQuantile(p, a, b), betaQuantileUpper(p, a, b), betaCdf(p, a, b), betaCdfUpper(p, a, b)]) {
          expect(x).toBeGreaterThanOrEqual(0);
          expect(x).toBeLessThanOrEqual(1);
        }
      }),
      { numRuns: 500, seed: 3 },
    );
  });

  it('refuses shapes and probabilities that are none', () => {
    for (const [p, a, b] of [
      [0.5, 0, 0],
      [0.5, -1, 2],
      [0.5, NaN, 2],
      [0.5, Infinity, 2],
      [-0.1, 1, 2],
      [1.1, 1, 2],
      [NaN, 1, 2],
    ] as const) {
      expect(() => betaQuantile(p, a, b)).toThrow(RangeError);
      expect(() => betaQuantileUpper(p, a, b)).toThrow(RangeError);
    }
  });
});

describe('The Beta distribution function', () => {
  it('is right to 1e-10 relative in both tails at every check value above 1e-305 (mpmath, 40 digits)', () => {
    const misses = cases.flatMap(({ a, b, x, lower, upper }) => [
      Number(lower) > 1e-305 ? relativeMiss({ a, b, x, lower }, betaCdf(Number(x), a, b), Number(lower), 1e-10) : null,
      Number(upper) > 1e-305
        ? relativeMiss({ a, b, x, upper }, betaCdfUpper(Number(x), a, b), Number(upper), 1e-10)
        : null,
    ]);
    expect(misses.filter(Boolean)).toEqual([]);
  });

  it('agrees with @stdlib within 1e-10 where that is sound: shapes up to 1e3 that are no integers, tails above 1e-200', () => {
    const sound = cases.filter(({ a, b, x }) => Math.max(a, b) <= 1e3 && Number(x) < 1);
    const misses = sound.map(({ a, b, x }) => {
      const [off, other] = [a + 0.125, b + 0.125];
      const point = Number(x);
      if (betaCdf(point, off, other) < 1e-200) return null;
      return relativeMiss({ off, other, x }, betaCdf(point, off, other), betaCdfOfStdlib(point, off, other), 1e-10);
    });
    expect(misses.filter(Boolean)).toEqual([]);
    expect(misses.length).toBeGreaterThan(500);
  });

  it('has tails that add up to 1', () => {
    fc.assert(
      fc.property(shape, shape, probability, (a, b, x) => {
        expect(betaCdf(x, a, b) + betaCdfUpper(x, a, b)).toBeCloseTo(1, 15);
      }),
    );
  });

  it('is a step for a shape of 0, and 0 and 1 outside (0, 1)', () => {
    expect([betaCdf(-1, 0, 2), betaCdf(0, 0, 2), betaCdf(0.5, 2, 0), betaCdf(1, 2, 0)]).toEqual([0, 1, 0, 1]);
    expect([betaCdf(-1, 2, 2), betaCdf(0, 2, 2), betaCdf(1, 2, 2), betaCdfUpper(7, 2, 2)]).toEqual([0, 0, 1, 0]);
    expect(() => betaCdf(NaN, 1, 1)).toThrow(RangeError);
  });
});
