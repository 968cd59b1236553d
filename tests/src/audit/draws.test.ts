import { describe, expect, it } from 'vitest';
import { ANCHOR_SHAPE, betaVariate, intervalOfDraws, quantileOfSorted } from '../../../src/audit/draws';
import { auditReplicas, FEWEST_REPLICAS, MOST_CELLS, REPLICAS, watchMatrices } from '../../../src/audit/matrix-draws';
import { PURPOSE, streamOf } from '../../../src/numerics/random';
import { namesOf, tallyOf } from './invented-campaign';
import { inputOf, sampler, studyOf } from './invented-study';

const DRAWN = 40_000;
const marginal = (a: number, b: number) => ({ a, b, method: 'exact' as const });

describe('A Beta variate', () => {
  it.each([
    [0.999 * ANCHOR_SHAPE, 0.05],
    [1.001 * ANCHOR_SHAPE, 0.05],
    [1e-3, 1e-4],
    [1e-9, 3e-9],
    [0.5, 12],
    [900, 2],
  ])('of shapes %f and %f has the mean and variance of its law (5 standard errors), tiny shapes too', (a, b) => {
    const stream = streamOf(1, PURPOSE.test, 50, 0);
    const draws = Array.from({ length: DRAWN }, () => betaVariate(stream, marginal(a, b)));
    const mean = a / (a + b);
    const variance = (mean * (1 - mean)) / (a + b + 1);
    const found = draws.reduce((x, y) => x + y, 0) / DRAWN;
    const square = (power: number): number => draws.reduce((x, y) => x + (y - mean) ** power, 0) / DRAWN;
    expect(draws.every((x) => x >= 0 && x <= 1)).toBe(true);
    expect(Math.abs(found - mean)).toBeLessThanOrEqual(5 * Math.sqrt(variance / DRAWN));
    const error = Math.sqrt(Math.max(0, square(4) - square(2) ** 2) / DRAWN);
    expect(Math.abs(square(2) - variance)).toBeLessThanOrEqual(5 * error + variance / Math.sqrt(DRAWN));
  });

  it('is certain where a shape is 0', () => {
    const stream = streamOf(1, PURPOSE.test, 51, 0);
    expect([betaVariate(stream, marginal(0, 3)), betaVariate(stream, marginal(3, 0))]).toEqual([0, 1]);
  });
});

describe('An interval of draws', () => {
  it('interpolates order statistics as numpy.quantile does', () => {
    // numpy.quantile([1, 2, 4, 8, 16], [0.1, 0.9]) of NumPy 2.4.6.
    const interval = intervalOfDraws(Float64Array.of(8, 1, 16, 4, 2), 0.8);
    expect(interval.lower).toBeCloseTo(1.4, 14);
    expect(interval.upper).toBeCloseTo(12.8, 14);
    expect(quantileOfSorted(Float64Array.of(3), 0.3)).toBe(3);
  });
});

describe('The matrices an audit looks at', () => {
  const events = [
    [1, 2, 3],
    [0, 0, 0],
    [4, 0, 9],
  ];
  const tally = tallyOf({ columnNames: namesOf(1), outcomeNames: namesOf(1), events });

  it('are the first replicas of the ensemble, whatever the number of blocks', () => {
    const { posterior } = inputOf(studyOf(1, 1), tally);
    const seen: number[][] = [];
    watchMatrices(posterior, sampler, 5, 70, [{ watch: (matrix) => seen.push([...matrix]) }]);
    expect(seen).toHaveLength(70);
    const block = new Float64Array(6 * 9);
    sampler(posterior, 5)(2, 6, block);
    expect(seen.slice(64).flat()).toEqual([...block]);
  });

  it('hold 0 in a column without posterior, and add up to 1 in the others', () => {
    const { posterior } = inputOf(studyOf(1, 1, { prior: { pseudoCount: 0 } }), tally);
    const watch = (matrix: Float64Array): void => {
      expect([...matrix.subarray(3, 6)]).toEqual([0, 0, 0]);
      expect(matrix.reduce((a, b) => a + b)).toBeCloseTo(2, 12);
    };
    watchMatrices(posterior, sampler, 5, 3, [{ watch }]);
    expect(posterior.shape[3]).toBe(0);
  });

  it('are fewer where the matrix is large, never under the fewest', () => {
    const of = (cells: number): number =>
      auditReplicas({ columns: 1, outcomes: cells, shape: new Float64Array(0), scale: null });
    expect(of(MOST_CELLS / REPLICAS)).toBe(REPLICAS);
    expect(of((2 * MOST_CELLS) / REPLICAS)).toBe(REPLICAS / 2);
    expect(of(MOST_CELLS)).toBe(FEWEST_REPLICAS);
  });
});
