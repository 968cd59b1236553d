import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import { breaksOf, sequentialBetas, sharesOf } from '../../../src/ensemble/sequential';
import { streamOf } from '../../../src/numerics/random';

const weights = fc
  .array(fc.oneof(fc.constant(0), fc.double({ min: 1e-12, max: 1, noNaN: true })), { minLength: 1, maxLength: 30 })
  .filter((list) => list.some((w) => w > 0));
const breaks = fc.array(fc.oneof(fc.constantFrom(0, 1), fc.double({ min: 0, max: 1, noNaN: true })), { maxLength: 30 });

const normalised = (list: readonly number[]): Float64Array => {
  const total = list.reduce((a, b) => a + b, 0);
  return Float64Array.from(list, (w) => w / total);
};

describe('The sequential form of a Dirichlet', () => {
  it('has the shape of an outcome and the sum of those after it as Beta parameters (worked by hand)', () => {
    const { a, b } = sequentialBetas(Float64Array.of(2, 3.5, 0.5, 4));
    expect([[...a], [...b]]).toEqual([
      [2, 3.5, 0.5],
      [8, 4.5, 4],
    ]);
  });

  it('breaks off nothing for a shape of 0, everything before trailing zeros, and is a Beta everywhere', () => {
    const { a, b } = sequentialBetas(Float64Array.of(0, 2, 0, 3, 0, 0));
    expect([[...a], [...b]]).toEqual([
      [0, 2, 0, 3, 0],
      [5, 3, 3, 0, 1],
    ]);
  });

  it('gives the shares back from their breaks, within 1e-14', () => {
    fc.assert(
      fc.property(weights, (list) => {
        const shares = normalised(list);
        const again = sharesOf(breaksOf(shares));
        shares.forEach((share, k) => expect(Math.abs(again[k]! - share)).toBeLessThan(1e-14));
      }),
      { seed: 5 },
    );
  });

  it('takes shares of any total: breaks are ratios', () => {
    const shares = Float64Array.of(0.25, 0.25, 0.5);
    expect(breaksOf(shares.map((share) => 64 * share))).toEqual(breaksOf(shares));
  });

  it('makes shares that are at least 0 and add up to 1 of any breaks, within 1e-14', () => {
    fc.assert(
      fc.property(breaks, (list) => {
        const shares = sharesOf(Float64Array.from(list));
        expect(Math.min(...shares)).toBeGreaterThanOrEqual(0);
        expect(Math.abs(shares.reduce((a, b) => a + b) - 1)).toBeLessThan(1e-14);
      }),
      { seed: 6 },
    );
  });

  it('keeps breaks that are not lost beside 1: back from their shares within 1e-9', () => {
    const middling = fc.array(fc.double({ min: 0.01, max: 0.6, noNaN: true }), { maxLength: 20 });
    fc.assert(
      fc.property(middling, (list) => {
        const again = breaksOf(sharesOf(Float64Array.from(list)));
        list.forEach((z, k) => expect(Math.abs(again[k]! / z - 1)).toBeLessThan(1e-9));
      }),
      { seed: 7 },
    );
  });

  it('has a zero where shares have one, and ends with breaks of 0 once nothing is left', () => {
    expect([...breaksOf(Float64Array.of(0, 1, 0, 0))]).toEqual([0, 1, 0]);
    expect([...sharesOf(Float64Array.of(0, 1, 0))]).toEqual([0, 1, 0, 0]);
  });

  it('drawn from independent Betas has the mean and variance of the Dirichlet, within 5 standard errors', () => {
    const shape = Float64Array.of(0.5, 2.5, 7, 1);
    const total = 11;
    const { a, b } = sequentialBetas(shape);
    const stream = streamOf(20261201, 6, 3, 0);
    const draws = 40_000;
    const columns = shape.length;
    const [sum, squares] = [new Float64Array(columns), new Float64Array(columns)];
    for (let i = 0; i < draws; i++) {
      const z = a.map((_, k) => {
        const [x, y] = [stream.gamma(a[k]!), stream.gamma(b[k]!)];
        return x / (x + y);
      });
      sharesOf(z).forEach((p, k) => {
        sum[k]! += p;
        squares[k]! += (p - shape[k]! / total) ** 2;
      });
    }
    shape.forEach((alpha, k) => {
      const mean = alpha / total;
      const variance = (mean * (1 - mean)) / (total + 1);
      expect(Math.abs(sum[k]! / draws - mean)).toBeLessThan(5 * Math.sqrt(variance / draws));
      // The fourth central moment of a share is below 12 squared variances for these shapes.
      expect(Math.abs(squares[k]! / draws - variance)).toBeLessThan(5 * variance * Math.sqrt(11 / draws));
    });
  });
});
