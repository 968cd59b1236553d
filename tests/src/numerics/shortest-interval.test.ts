import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import { betaCdf, betaCdfUpper, betaQuantile } from '../../../src/numerics/beta';
import { shortestInterval } from '../../../src/numerics/shortest-interval';

/** The least length of an interval of the given content, by trying lower ends and narrowing on the best (numeric optimisation). */
function leastLength(credibility: number, a: number, b: number): number {
  const lengthFrom = (below: number): number =>
    betaQuantile(Math.min(1, below + credibility), a, b) - betaQuantile(below, a, b);
  let [from, to] = [0, 1 - credibility];
  let best = Infinity;
  for (let turn = 0; turn < 12; turn++) {
    const steps = 40;
    const lengths = Array.from({ length: steps + 1 }, (_, i) => lengthFrom(from + ((to - from) * i) / steps));
    const at = lengths.indexOf(Math.min(...lengths));
    best = Math.min(best, lengths[at]!);
    const step = (to - from) / steps;
    [from, to] = [Math.max(from, from + step * (at - 1)), Math.min(to, from + step * (at + 1))];
  }
  return best;
}

const content = ({ lower, upper }: { lower: number; upper: number }, a: number, b: number): number =>
  1 - betaCdf(lower, a, b) - betaCdfUpper(upper, a, b);

describe('The shortest interval', () => {
  it.each([
    [0.95, 1.5, 1000],
    [0.68, 7.5, 100],
    [0.95, 2, 2],
    [0.9, 1.001, 5],
    [0.95, 3, 1.2],
    [0.99, 2000, 1.5],
    [0.95, 1e5, 1e6],
    [0.95, 0.5, 40],
    [0.95, 40, 0.5],
    [0.5, 0.3, 0.6],
    [0.9, 0.6, 0.3],
    [0.9, 1, 6],
    [0.95, 1e7, 1e7],
  ])('of content %d of Beta(%d, %d) is as short as numeric optimisation finds, within 1e-8', (credibility, a, b) => {
    const interval = shortestInterval(credibility, a, b);
    expect(Math.abs(content(interval, a, b) - credibility)).toBeLessThan(1e-10);
    const ratio = (interval.upper - interval.lower) / leastLength(credibility, a, b);
    expect(Math.abs(ratio - 1)).toBeLessThan(1e-8);
  });

  it('has the same density at both ends when both shapes are above 1', () => {
    const between = fc.double({ min: 1.2, max: 400, noNaN: true });
    fc.assert(
      fc.property(between, between, fc.double({ min: 0.2, max: 0.99, noNaN: true }), (a, b, credibility) => {
        const { lower, upper } = shortestInterval(credibility, a, b);
        const log = (x: number): number => (a - 1) * Math.log(x) + (b - 1) * Math.log1p(-x);
        // An end is a double: beside 1 a rounding of 1e-16 moves its logarithm by as much over the distance.
        const known = 1e-7 + (1e-15 * b) / (1 - upper) + (1e-15 * a) / lower;
        expect(Math.abs(log(lower) - log(upper))).toBeLessThan(known);
        expect(Math.abs(content({ lower, upper }, a, b) - credibility)).toBeLessThan(1e-10);
      }),
      { seed: 4 },
    );
  });

  it('begins at 0 for a falling density, ends at 1 for a rising one, and is the middle of a uniform one', () => {
    expect(shortestInterval(0.9, 1, 2).lower).toBe(0);
    expect(shortestInterval(0.9, 0.5, 1).lower).toBe(0);
    expect(shortestInterval(0.9, 2, 1).upper).toBe(1);
    expect(shortestInterval(0.9, 1, 0.5).upper).toBe(1);
    expect(shortestInterval(0.9, 1, 1).lower).toBeCloseTo(0.05, 15);
    expect(shortestInterval(0.9, 1, 1).upper).toBeCloseTo(0.95, 15);
  });

  it('of a density that rises to both ends is the shorter one-sided interval, the left one where they are equal', () => {
    expect(shortestInterval(0.9, 0.5, 0.5).lower).toBe(0);
    expect(shortestInterval(0.9, 0.3, 0.6).lower).toBe(0);
    expect(shortestInterval(0.9, 0.6, 0.3).upper).toBe(1);
  });

  it('is a point for a shape of 0, and comes to [0, q] as the peak comes to 0', () => {
    expect(shortestInterval(0.9, 0, 2)).toEqual({ lower: 0, upper: 0 });
    expect(shortestInterval(0.9, 2, 0)).toEqual({ lower: 1, upper: 1 });
    const near = shortestInterval(0.9, 1 + 1e-9, 7);
    expect(near.lower).toBeLessThan(1e-100);
    expect(near.upper).toBeCloseTo(shortestInterval(0.9, 1, 7).upper, 7);
  });

  it('refuses a credibility outside (0, 1) and two shapes of 0', () => {
    for (const bad of [0, 1, -1, NaN]) expect(() => shortestInterval(bad, 2, 2)).toThrow(RangeError);
    expect(() => shortestInterval(0.9, 0, 0)).toThrow(RangeError);
  });
});
