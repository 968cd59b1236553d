import { readFileSync } from 'node:fs';
import { describe, expect, it } from 'vitest';
import { referenceOf } from '../../../src/audit/reference';
import { parseReferenceTable } from '../../../src/audit/reference-table';
import type { Axis } from '../../../src/study/axis';
import type { Reference } from '../../../src/study/study';
import { namesOf, tallyOf } from './invented-campaign';

interface Case {
  name: string;
  edges: number[];
  spacing: 'linear' | 'log';
  observed: [number, number] | null;
  reference: Reference;
  table?: string;
  contents: number[];
  lowerShares: number[];
}

const made = JSON.parse(
  readFileSync(new URL('../../reference/reference-spectrum/values.json', import.meta.url), 'utf8'),
) as {
  cases: Case[];
};
/** Closed forms keep about 13 digits here; the quadrature they are held against keeps more than 20. */
const TOLERANCE = 2e-13;

const axisOf = (edges: number[], spacing: 'linear' | 'log' = 'linear'): Axis => ({
  kind: 'numeric',
  label: 'Energy',
  unit: 'MeV',
  spacing,
  edges: Float64Array.from(edges),
});
const emptyTally = (bins: number, observed: [number, number] | null = null) => {
  const names = namesOf(bins);
  return tallyOf({
    columnNames: names,
    outcomeNames: ['b1'],
    events: names.map(() => [0]),
    trueRange: observed && { least: observed[0], greatest: observed[1] },
  });
};
const far = (found: Float64Array, expected: number[]): number =>
  Math.max(...expected.map((value, i) => Math.abs(found[i]! - value) / Math.max(Math.abs(value), 1e-12)));

describe('The reference spectrum', () => {
  it.each(made.cases)(
    'of $name agrees with quadrature at 40 digits (mpmath, tests/reference/reference-spectrum)',
    (c) => {
      const tally = emptyTally(c.edges.length - 1, c.observed);
      const found = referenceOf(c.reference, axisOf(c.edges, c.spacing), tally, { readTable: () => c.table! });
      // A steep law's digits go with its exponent: index 250 over two decades is a factor of 1e502.
      const tolerance = TOLERANCE * Math.max(1, Math.abs(c.reference.index ?? 0));
      expect(far(found.contents, c.contents)).toBeLessThan(tolerance);
      const filled = c.lowerShares.map((share, j) => (found.contents[j]! > 0 ? share : 1));
      expect(far(found.lowerShares, filled)).toBeLessThan(tolerance);
      expect(Math.abs(found.contents.reduce((a, b) => a + b, 0) / c.reference.events - 1)).toBeLessThan(1e-14);
    },
  );

  it('of the calibration takes the shares of the tally and of its halves', () => {
    const tally = tallyOf({
      columnNames: namesOf(2),
      outcomeNames: ['b1', 'b2'],
      events: [
        [1, 1],
        [3, 5],
        [0, 0],
        [6, 4],
      ],
      halves: [
        [
          [1, 1],
          [0, 0],
        ],
        [
          [1, 1],
          [2, 4],
        ],
        [
          [0, 0],
          [0, 0],
        ],
        [
          [6, 4],
          [0, 0],
        ],
      ],
    });
    const found = referenceOf({ kind: 'calibration', events: 200 }, axisOf([0, 1, 2]), tally);
    expect([...found.contents]).toEqual([20, 80, 0, 100]);
    expect([...found.lowerShares]).toEqual([1, 0.25, 1, 1]);
    expect(found.range).toBeNull();
  });

  it('of the calibration takes weights where they are read, and a column of negative weight as empty', () => {
    const tally = tallyOf({
      columnNames: ['a', 'b', 'c'],
      outcomeNames: ['x'],
      events: [[10], [10], [1]],
      weights: [[30], [10], [-2]],
      squares: [[90], [10], [4]],
    });
    const axis: Axis = { kind: 'tags', label: '', unit: '', tags: ['a', 'b', 'c'] };
    expect([...referenceOf({ kind: 'calibration', events: 4 }, axis, tally).contents]).toEqual([3, 1, 0]);
  });

  it('of an empty tally has contents of 0, never NaN', () => {
    const found = referenceOf({ kind: 'calibration', events: 4 }, axisOf([0, 1]), emptyTally(1));
    expect([...found.contents]).toEqual([0, 0, 0]);
  });

  it('on a tag axis is the calibration or equal content, and no other kind', () => {
    const axis: Axis = { kind: 'tags', label: '', unit: '', tags: ['electron', 'pion'] };
    const tally = tallyOf({ columnNames: ['electron', 'pion'], outcomeNames: ['x'], events: [[3], [1]] });
    expect([...referenceOf({ kind: 'flat', events: 10 }, axis, tally).contents]).toEqual([5, 5]);
    expect(() => referenceOf({ kind: 'powerLaw', index: -2, events: 10 }, axis, tally)).toThrow(
      'study: reference.kind: "powerLaw" on a tag axis: use "calibration" or "flat"',
    );
  });

  it('without observed values leaves the outer columns empty unless the study states a range', () => {
    const axis = axisOf([10, 20, 30]);
    const narrow = referenceOf({ kind: 'flat', events: 20 }, axis, emptyTally(2));
    expect([...narrow.contents]).toEqual([0, 10, 10, 0]);
    const wide = referenceOf({ kind: 'flat', from: 0, to: 40, events: 40 }, axis, emptyTally(2));
    expect([...wide.contents]).toEqual([10, 10, 10, 10]);
    expect(wide.description).toBe('flat spectrum from 0 to 40 MeV, 40 events');
    expect(wide.range).toEqual({ from: 0, to: 40 });
  });

  it('refuses a power law that reaches 0 and a range beside the axis', () => {
    const axis = axisOf([0, 20]);
    expect(() => referenceOf({ kind: 'powerLaw', index: -1, events: 1 }, axis, emptyTally(1))).toThrow(
      /reference\.from: a power law from 0/,
    );
    expect(() => referenceOf({ kind: 'flat', from: 30, to: 40, events: 1 }, axis, emptyTally(1))).toThrow(
      /misses the true axis/,
    );
  });
});

describe('A reference table', () => {
  it.each([
    ['lo,hi,content\n0,1,2\n1,2\n', 's.csv:3: 2 fields: give three: lo, hi, content'],
    ['0,1,2\n1,two,3\n', 's.csv:2: hi "two" is no finite number: correct it'],
    ['0,1,2\n1,,3\n', 's.csv:2: hi "" is no finite number: correct it'],
    ['0,1,2\r\n3,2,3\r\n', 's.csv:2: hi 2 is not above lo 3: give hi > lo'],
    ['0,1,-2\n', 's.csv:1: content -2 is negative: give 0 or more'],
    ['# note\n0,2,2\n1,3,1\n', 's.csv:3: lo 1 lies before the end of the row above (2)'],
    ['lo,hi,content\n0,1,0\n', 's.csv: no content above 0: give rows of lo, hi, content'],
    ['', 's.csv: no content above 0'],
  ])('%j is refused in one line that names file, line and remedy', (text, message) => {
    expect(() => parseReferenceTable(text, 's.csv')).toThrow(message);
  });

  it('may have a header, notes, empty lines, gaps and a byte order mark', () => {
    const table = parseReferenceTable('\uFEFFLo, Hi, Content\n# measured\n\n0, 1, 2\n3,4,1e2\n', 's.csv');
    expect([...table.lo, ...table.hi, ...table.content]).toEqual([0, 3, 1, 4, 2, 100]);
  });
});
