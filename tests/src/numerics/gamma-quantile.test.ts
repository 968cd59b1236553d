import { describe, expect, it } from 'vitest';
import { gammaQuantile, gammaTails } from '../../../src/numerics/gamma-quantile';
import reference from '../../reference/gamma-quantile/expected.json';

describe('the Gamma quantile', () => {
  it('is that of mpmath at 60 digits within 1e-10 relative, shapes 0.1 to 12345.5, tails to 1e-12', () => {
    for (const [p, a, expected] of reference.cases as [number, number, number][]) {
      const found = gammaQuantile(p, a);
      const off = Math.abs(found - expected) / expected;
      expect(off, `p ${p}, shape ${a}: ${found} instead of ${expected}`).toBeLessThan(1e-10);
    }
  });

  it('inverts its own distribution function at shapes up to 1e7', () => {
    for (const a of [1e5, 1e6, 1e7]) {
      for (const p of [0.025, 0.5, 0.975]) expect(gammaTails(gammaQuantile(p, a), a).lower).toBeCloseTo(p, 9);
    }
  });

  it('of shape 1 is that of an exponential', () => {
    for (const p of [0.1, 0.5, 0.95]) expect(gammaQuantile(p, 1)).toBeCloseTo(-Math.log1p(-p), 13);
  });

  it('of shape 0 is 0, and of what is no shape or no probability an error', () => {
    expect(gammaQuantile(0.5, 0)).toBe(0);
    for (const [p, a] of [
      [0.5, -1],
      [0.5, NaN],
      [0, 1],
      [1, 1],
    ] as const)
      expect(() => gammaQuantile(p, a)).toThrow(RangeError);
  });
});
