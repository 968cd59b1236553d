import { describe, expect, it } from 'vitest';
import { deviance, logGamma, logPoisson, stirlingError } from '../../../src/numerics/stirling';
import { reference, relativeMiss } from './reference';

const made = reference<{
  stirling: { x: number; value: string; logGamma: string }[];
  deviance: { x: number; m: number; value: string }[];
  poisson: { k: number; mean: number; log: string }[];
}>('stirling');

describe("What Stirling's formula leaves out", () => {
  it.each(made.stirling)('at $x agrees with mpmath within 1e-15, or 1e-14 below 1', ({ x, value }) => {
    expect(Math.abs(stirlingError(x) - Number(value))).toBeLessThan(x < 1 ? 1e-14 : 1e-15);
  });

  it('is continuous where the series takes over from the recurrence, at 12', () => {
    const step = 2 ** -49;
    expect(Math.abs(stirlingError(12 - step) - stirlingError(12))).toBeLessThan(1e-16);
  });

  it('makes ln Gamma right to 1e-14 of it or of 1', () => {
    for (const { x, logGamma: known } of made.stirling) {
      expect(Math.abs(logGamma(x) - Number(known))).toBeLessThan(1e-14 * Math.max(1, Math.abs(Number(known))));
    }
  });
});

describe('The deviance x ln(x / m) + m - x', () => {
  it('agrees with mpmath to 1e-13 relative, near and far, and at 0', () => {
    const misses = made.deviance.map(({ x, m, value }) => relativeMiss({ x, m }, deviance(x, m), Number(value), 1e-13));
    expect(misses.filter(Boolean)).toEqual([]);
  });

  it('is continuous where the series ends, at a relative distance of 0.1', () => {
    const [m, ratio] = [900, 1.1 / 0.9];
    const [inside, outside] = [deviance(m * ratio * (1 - 1e-12), m), deviance(m * ratio * (1 + 1e-12), m)];
    const slope = m * ratio * Math.log(ratio) * 2e-12;
    expect(Math.abs(outside - inside - slope)).toBeLessThan(1e-12);
  });
});

describe('The logarithm of a Poisson probability', () => {
  it('agrees with mpmath within 1e-13 relative up to counts of 1e12', () => {
    const misses = made.poisson.map(({ k, mean, log }) =>
      relativeMiss({ k, mean }, logPoisson(k, mean), Number(log), 1e-13),
    );
    expect(misses.filter(Boolean)).toEqual([]);
  });
});
