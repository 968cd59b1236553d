import { describe, expect, it } from 'vitest';
import { clopperPearson } from '../../../src/posterior/clopper-pearson';
import { cellInterval, equalTailed, lowerLimit, shareInterval, upperLimit } from '../../../src/posterior/intervals';

const half = { a: 2, b: 3, method: 'exact' as const };

describe('intervals of a share', () => {
  it('a flat posterior has intervals that can be written down', () => {
    const flat = { a: 1, b: 1, method: 'exact' as const };
    const { lower, upper } = equalTailed(flat, 0.9);
    expect(lower).toBeCloseTo(0.05, 14);
    expect(upper).toBeCloseTo(0.95, 14);
    expect(upperLimit(flat, 0.9).upper).toBeCloseTo(0.9, 14);
    expect(lowerLimit(flat, 0.9).lower).toBeCloseTo(0.1, 14);
  });

  it('a certain share has an interval of no width', () => {
    expect(equalTailed({ a: 0, b: 3, method: 'exact' }, 0.95)).toEqual({ lower: 0, upper: 0 });
    expect(equalTailed({ a: 3, b: 0, method: 'exact' }, 0.95)).toEqual({ lower: 1, upper: 1 });
  });

  it('a cell without events shows an upper limit, one with events an interval', () => {
    expect(cellInterval(half, 0, 0.95, 'equal-tailed')).toEqual(upperLimit(half, 0.95));
    expect(cellInterval(half, 1, 0.95, 'equal-tailed')).toEqual(equalTailed(half, 0.95));
  });

  it('a share and what is left of it have intervals that are each other mirrored', () => {
    const rest = { a: half.b, b: half.a, method: half.method };
    for (const [inside, outside] of [
      [0, 9],
      [9, 0],
      [4, 5],
    ] as const) {
      const one = shareInterval(half, inside, outside, 0.95);
      const other = shareInterval(rest, outside, inside, 0.95);
      expect(one.lower).toBeCloseTo(1 - other.upper, 14);
      expect(one.upper).toBeCloseTo(1 - other.lower, 14);
    }
  });
});

describe('Clopper-Pearson interval', () => {
  it('agrees with the NIST/SEMATECH e-Handbook, 7.2.4.1: 4 of 20 defective at 90 %', () => {
    // The handbook prints 0.071354 and 0.401029, from a root finder that stops within 1e-5.
    const { lower, upper } = clopperPearson(4, 20, 0.9);
    expect(Math.abs(lower - 0.071354)).toBeLessThan(1e-6);
    expect(Math.abs(upper - 0.401029)).toBeLessThan(2e-6);
  });

  it('has closed ends for none and for all of the trials', () => {
    const none = clopperPearson(0, 30, 0.95);
    expect(none.lower).toBe(0);
    expect(none.upper).toBeCloseTo(1 - 0.025 ** (1 / 30), 14);
    const all = clopperPearson(30, 30, 0.95);
    expect(all.upper).toBe(1);
    expect(all.lower).toBeCloseTo(0.025 ** (1 / 30), 14);
  });

  it('covers at least as often as it says, and is wider than the credible interval under a Jeffreys prior', () => {
    for (const p of [0.03, 0.2, 0.5]) {
      let covered = 0;
      let probability = (1 - p) ** 40;
      for (let n = 0; n <= 40; n++) {
        const { lower, upper } = clopperPearson(n, 40, 0.9);
        const bayes = equalTailed({ a: n + 0.5, b: 40.5 - n, method: 'exact' }, 0.9);
        expect(upper - lower).toBeGreaterThan(bayes.upper - bayes.lower);
        if (lower <= p && p <= upper) covered += probability;
        probability *= (((40 - n) / (n + 1)) * p) / (1 - p);
      }
      expect(covered).toBeGreaterThanOrEqual(0.9);
    }
  });
});
