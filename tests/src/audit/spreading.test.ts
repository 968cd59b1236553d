import { readFileSync } from 'node:fs';
import { describe, expect, it } from 'vitest';
import { bestAddition, leastAddition, PLAN_PRECISION } from '../../../src/audit/spreading';

interface Case {
  totals: number[];
  growth: number[];
  c: number[][];
  bound: number[];
  least: number[];
  weights: number[];
  events: number;
  best: number[];
  value: number;
}
const made = JSON.parse(readFileSync(new URL('../../reference/planner/values.json', import.meta.url), 'utf8')) as {
  cases: Case[];
};
const sum = (values: ArrayLike<number>): number => Array.from(values).reduce((a, b) => a + b, 0);

describe.each(made.cases.map((c, i) => ({ ...c, i })))(
  'Spreading events, case $i (SLSQP of SciPy, tests/reference/planner)',
  (c) => {
    const columns = { totals: Float64Array.from(c.totals), growth: Float64Array.from(c.growth) };
    const later = (n: ArrayLike<number>): number[] => c.totals.map((p, j) => p + c.growth[j]! * n[j]!);

    it('meets every bound with no more events than the general optimiser needs', () => {
      const n = leastAddition(columns, Float64Array.from(c.c.flat()), Float64Array.from(c.bound));
      c.bound.forEach((bound, k) => {
        expect(sum(later(n).map((t, j) => c.c[j]![k]! / t))).toBeLessThanOrEqual(bound * (1 + 1e-12));
      });
      // Raised by a part in ten thousand of all totals at the most, so that no bound is missed.
      const room = 3 * PLAN_PRECISION * (sum(c.least) + sum(c.totals));
      expect(sum(n)).toBeLessThan(sum(c.least) + room);
      expect(sum(n)).toBeGreaterThan(sum(c.least) - room);
      expect(n.every((x) => x >= 0)).toBe(true);
    });

    it('spends a fixed number of events at least as well, and all of it', () => {
      const n = bestAddition(columns, Float64Array.from(c.weights), c.events);
      expect(sum(n) / c.events).toBeCloseTo(1, 9);
      const value = sum(later(n).map((t, j) => c.weights[j]! / t));
      expect(value / c.value).toBeLessThan(1 + 1e-9);
      expect(value / c.value).toBeGreaterThan(1 - 1e-4);
    });
  },
);

describe('Spreading events', () => {
  it('by one bound alone is the square-root rule in closed form', () => {
    const columns = { totals: Float64Array.of(1, 1, 1), growth: Float64Array.of(1, 1, 1) };
    const c = [4, 9, 1];
    const n = leastAddition(columns, Float64Array.from(c), Float64Array.of(0.1));
    // T_j = sqrt(c_j) sum sqrt(c) / b = 60 sqrt(c_j).
    [120, 180, 60].forEach((t, j) => expect(n[j]! / (t - 1)).toBeCloseTo(1, 3));
  });

  it('asks for nothing where every bound is met, and nothing of columns that do not matter', () => {
    const columns = { totals: Float64Array.of(10, 10), growth: Float64Array.of(1, 1) };
    expect([...leastAddition(columns, Float64Array.of(1, 1), Float64Array.of(1))]).toEqual([0, 0]);
    const n = leastAddition(columns, Float64Array.of(1, 0), Float64Array.of(0.01));
    expect(n[0]).toBeCloseTo(90, 1);
    expect(n[1]).toBe(0);
    expect([...leastAddition(columns, new Float64Array(0), new Float64Array(0))]).toEqual([0, 0]);
  });

  it('spreads evenly where no column adds any variance', () => {
    const columns = { totals: Float64Array.of(10, 30), growth: Float64Array.of(1, 1) };
    expect([...bestAddition(columns, Float64Array.of(0, 0), 8)]).toEqual([4, 4]);
    expect(sum(bestAddition(columns, Float64Array.of(1, 2), 0))).toBe(0);
  });
});
