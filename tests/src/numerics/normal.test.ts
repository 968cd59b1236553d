import { describe, expect, it } from 'vitest';
import { normalCdf, normalQuantile } from '../../../src/numerics/normal';

/** scipy.stats.norm of SciPy 1.17.1. */
const CDF = [
  [-37, 5.7255712225239266e-300],
  [-8, 6.22096057427174e-16],
  [-1.5, 0.06680720126885807],
  [0, 0.5],
  [0.3, 0.6179114221889526],
  [2, 0.9772498680518208],
  [8.2, 0.9999999999999999],
] as const;
const QUANTILE = [
  [1e-300, -37.0470962993612],
  [1e-12, -7.034483825301131],
  [0.025, -1.9599639845400545],
  [0.5, 0],
  [0.84, 0.994457883209753],
  [0.999999999, 5.997807019601637],
] as const;

describe('The standard normal (SciPy 1.17.1)', () => {
  it.each(CDF)('has distribution function at %f', (x, p) => {
    expect(Math.abs(normalCdf(x) / p - 1)).toBeLessThan(4e-16 * (1 + x * x));
  });
  it.each(QUANTILE)('has quantile at %f', (p, x) => {
    expect(Math.abs(normalQuantile(p) - x)).toBeLessThan(1e-9 * Math.max(1e-4, Math.abs(x)));
  });
  it('takes infinities as certainty', () => {
    expect([normalCdf(-Infinity), normalCdf(Infinity)]).toEqual([0, 1]);
    expect([normalQuantile(0), normalQuantile(1)]).toEqual([-Infinity, Infinity]);
  });
});
