import { describe, expect, it } from 'vitest';
import { exp, log } from '../../../src/numerics/exp-log';
import { reference } from './reference';

interface Known {
  x: number;
  value: string;
}
const made = reference<{ exp: Known[]; log: Known[] }>('exp-log');

/** The distance of neighbouring doubles at a number. */
function unit(x: number): number {
  return Math.max(2 ** -1074, 2 ** (Math.floor(Math.log2(Math.abs(x))) - 52));
}

/** How many units in the last place `found` is off; the known value is held in two doubles. */
function unitsOff(found: number, { value }: Known): number {
  const known = Number(value);
  return Math.abs(found - known) / unit(known);
}

describe('The exponential of IEEE arithmetic alone', () => {
  it('is within 1.2 units in the last place, half of one more for the rounding of the check value (mpmath)', () => {
    const misses = made.exp.filter((known) => unitsOff(exp(known.x), known) > 1.7);
    expect(misses.map(({ x, value }) => `${x}: ${exp(x)} instead of ${value}`)).toEqual([]);
  });

  it('is exact at 0, and 0, infinite or NaN beyond the doubles', () => {
    expect([exp(0), exp(-745), exp(-745.2), exp(-1e300), exp(-Infinity)]).toEqual([1, 5e-324, 0, 0, 0]);
    expect([exp(709.78), exp(709.79), exp(1e300), exp(Infinity)]).toEqual([
      Math.exp(709.78),
      Infinity,
      Infinity,
      Infinity,
    ]);
    expect(exp(NaN)).toBeNaN();
  });
});

describe('The logarithm of IEEE arithmetic alone', () => {
  it('is within 1 unit in the last place, half of one more for the rounding of the check value (mpmath)', () => {
    const misses = made.log.filter((known) => unitsOff(log(known.x), known) > 1.5);
    expect(misses.map(({ x, value }) => `${x}: ${log(x)} instead of ${value}`)).toEqual([]);
  });

  it('is exact at 1 and at powers of 2, and -Infinity, NaN or infinite where there is none', () => {
    expect([log(1), log(2), log(0.5)]).toEqual([0, Math.LN2, -Math.LN2]);
    expect([log(0), log(Infinity)]).toEqual([-Infinity, Infinity]);
    expect([log(-1), log(NaN)]).toEqual([NaN, NaN]);
  });

  it('is continuous where the fraction is halved, near sqrt 2', () => {
    const steps = Array.from({ length: 64 }, (_, i) => Math.SQRT2 - 2e-5 + i * 1e-6).map(log);
    steps
      .slice(1)
      .forEach((value, i) => expect(Math.abs((value - steps[i]!) / 1e-6 - Math.SQRT1_2)).toBeLessThan(1e-4));
  });
});
