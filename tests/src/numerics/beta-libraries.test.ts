import { createRequire } from 'node:module';
import { describe, expect, it } from 'vitest';
import { betaCdf, betaQuantile } from '../../../src/numerics/beta';

/**
 * A second general-purpose library of the registry beside @stdlib: jstat 1.9.6 (MIT). It is sound in the body of the
 * distribution alone (its tails are wrong by orders of magnitude, see mpmath's values in tests/reference/beta), so it is asked
 * only there, and only to the digits it has.
 */
const { jStat } = createRequire(import.meta.url)('jstat') as {
  jStat: { beta: { cdf(x: number, a: number, b: number): number; inv(p: number, a: number, b: number): number } };
};

const SHAPES = [1, 1.5, 2.5, 7, 20.5, 80];
const PROBABILITIES = [0.1, 0.25, 0.5, 0.75, 0.9];

describe('Beta against jstat in the body of the distribution', () => {
  it('has its distribution function within 1e-7', () => {
    for (const a of SHAPES)
      for (const b of SHAPES)
        for (const p of PROBABILITIES) {
          const x = betaQuantile(p, a, b);
          expect(Math.abs(jStat.beta.cdf(x, a, b) - p), `${a}, ${b}, ${p}`).toBeLessThan(1e-7);
          expect(Math.abs(betaCdf(x, a, b) - jStat.beta.cdf(x, a, b))).toBeLessThan(1e-7);
        }
  });

  it('has its quantiles within 1e-6', () => {
    for (const a of SHAPES)
      for (const b of SHAPES)
        for (const p of PROBABILITIES) {
          expect(Math.abs(betaQuantile(p, a, b) - jStat.beta.inv(p, a, b)), `${a}, ${b}, ${p}`).toBeLessThan(1e-6);
        }
  });
});
