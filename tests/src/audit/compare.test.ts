import { readFileSync } from 'node:fs';
import { describe, expect, it } from 'vitest';
import { compareTallies, type ColumnComparison } from '../../../src/audit/compare';
import { isAbsent, type ListedMeasure, type Measure } from '../../../src/audit/measure';
import type { ReferenceSpectrum } from '../../../src/audit/reference';
import { namesOf, tallyOf } from './invented-campaign';
import { inputOf, sampler, studyOf } from './invented-study';

interface Column {
  distance: number;
  interval: [number, number];
  expectedDistance: number;
  gSquared: number;
  freedom: number;
  pValue: number;
  difference: number[];
  lower: number[];
  upper: number[];
}
interface Made {
  tables: number;
  contents: number[];
  /** `[events, weights, squares][columns][outcomes]`. */
  first: [number[][], number[][], number[][]];
  second: [number[][], number[][], number[][]];
  columns: (Column | null)[];
  change: { value: number[]; lower: number[]; upper: number[] };
}
const made = JSON.parse(readFileSync(new URL('../../reference/compare/values.json', import.meta.url), 'utf8')) as Made;

const study = studyOf(4, 4);
const frame = { columnNames: namesOf(4), outcomeNames: namesOf(4, true) };
const plain = (events: number[][]) => inputOf(study, tallyOf({ ...frame, events }));
const weighted = ([events, weights, squares]: Made['first']) =>
  inputOf(study, tallyOf({ ...frame, events, weights, squares }));
const first = plain(made.first[0]);
const second = plain(made.second[0]);
const reference: ReferenceSpectrum = {
  contents: Float64Array.from(made.contents),
  lowerShares: new Float64Array(6).fill(0.5),
  description: 'invented',
  range: null,
};
const listed = (measure: Measure): ListedMeasure => {
  if (isAbsent(measure)) throw new Error(measure.reason);
  return measure;
};

describe('The comparison of two campaigns (NumPy and SciPy, tests/reference/compare)', () => {
  const found = compareTallies(first, second, reference, sampler);
  const each = (check: (column: ColumnComparison, expected: Column, j: number) => void): void =>
    made.columns.forEach((expected, j) => {
      if (expected) check(found.columns[j] as ColumnComparison, expected, j);
    });

  it('has the distances, their intervals and the chance distance', () => {
    each((column, expected) => {
      expect(column.distance).toBeCloseTo(expected.distance, 13);
      const sd = (expected.interval[1] - expected.interval[0]) / 3.92;
      // Ends of 1,000 draws: 5 standard errors of a 2.5 % quantile.
      expect(Math.abs(column.lower - expected.interval[0])).toBeLessThan(0.42 * sd);
      expect(Math.abs(column.upper - expected.interval[1])).toBeLessThan(0.42 * sd);
      expect(Math.abs(column.expectedDistance / expected.expectedDistance - 1)).toBeLessThan(0.5);
    });
  });

  it('has the statistic and the p-value of homogeneity, and finds the one column that was changed', () => {
    each((column, expected) => {
      expect(column.gSquared / expected.gSquared).toBeCloseTo(1, 11);
      expect(column.freedom).toBe(expected.freedom);
      if (expected.pValue > 20 / made.tables) {
        expect(Math.abs(column.pValue / expected.pValue - 1)).toBeLessThan(
          5 * Math.hypot(1 / Math.sqrt(10), 1 / Math.sqrt(20)),
        );
      } else expect(column.pValue).toBeLessThan(0.01);
    });
    expect(found.columns.map((column) => ('reason' in column ? null : column.adjusted <= 0.05))).toEqual([
      false,
      false,
      true,
      false,
      false,
      null,
    ]);
    expect(found.columns[5]).toEqual({ reason: 'one of the two has no events here' });
  });

  it('has the difference of every cell with its interval', () => {
    each((_, expected, j) => {
      expected.difference.forEach((value, k) => {
        const at = j * frame.outcomeNames.length + k;
        const sd = (expected.upper[k]! - expected.lower[k]!) / 3.92;
        expect(found.differences.value[at]).toBeCloseTo(value, 13);
        // 5 standard errors of a 2.5 % quantile of 1,000 draws: 0.42 sd near-normal, 1 sd where the tail of a thin cell is exponential.
        const isFull = made.first[0][j]![k]! >= 20 && made.second[0][j]![k]! >= 20;
        const room = (isFull ? 0.45 : 1.05) * sd;
        expect(Math.abs(found.differences.lower[at]! - expected.lower[k]!)).toBeLessThan(room);
        expect(Math.abs(found.differences.upper[at]! - expected.upper[k]!)).toBeLessThan(room);
      });
    });
  });

  it('has the change of the folded reference spectrum', () => {
    const change = listed(found.folded.change);
    made.change.value.forEach((value, i) => {
      expect(change.value[i]).toBeCloseTo(value, 10);
      expect(change.lower[i]).toBeCloseTo(made.change.lower[i]!, 9);
      expect(change.upper[i]).toBeCloseTo(made.change.upper[i]!, 9);
      const parts = [found.folded.second, found.folded.first].map((measure) => listed(measure).value[i]!);
      expect(parts[0]! - parts[1]!).toBeCloseTo(value, 10);
    });
  });
});

describe('A comparison', () => {
  it('of a weighted with an unweighted campaign does not mistake the scale of weights for a difference', () => {
    const { columns } = compareTallies(first, weighted(made.second), reference, sampler);
    expect(columns.map((column) => ('reason' in column ? null : column.adjusted <= 0.05))).toEqual([
      false,
      false,
      true,
      false,
      false,
      null,
    ]);
  });

  it('of a campaign with itself finds no distance', () => {
    const { columns, folded } = compareTallies(first, first, reference, sampler);
    for (const column of columns) expect(column).toMatchObject({ distance: 0, gSquared: 0, pValue: 1 });
    expect(listed(folded.change).value).toEqual([0, 0, 0, 0]);
  });

  it('of other axes is refused with the first name that differs', () => {
    const other = inputOf(
      study,
      tallyOf({ ...frame, columnNames: [...frame.columnNames.slice(0, 5), 'far'], events: made.first[0] }),
    );
    expect(() => compareTallies(first, other, reference, sampler, 'b.bundle')).toThrow(
      'b.bundle: columns: "far" against "above": compare tallies of the same axes',
    );
    const fewer = inputOf(
      study,
      tallyOf({ ...frame, outcomeNames: namesOf(4), events: made.first[0].map((row) => row.slice(0, 6)) }),
    );
    expect(() => compareTallies(first, fewer, reference, sampler)).toThrow('second tally: 6 outcomes against 7');
  });

  it('leaves the folded spectrum absent, with the reason, where one cannot be folded', () => {
    const none = { ...reference, contents: new Float64Array(6) };
    expect(compareTallies(first, second, none, sampler).folded.change).toEqual({
      value: null,
      reason: 'the reference spectrum has no content',
    });
  });
});
