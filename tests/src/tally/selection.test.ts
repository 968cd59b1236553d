import { describe, expect, it } from 'vitest';
import type { Batch, Column } from '../../../src/events/batch';
import { parseStudy, type StudyInput } from '../../../src/study/study';
import { tallyPlan } from '../../../src/tally/plan';
import { LARGEST_WEIGHT, LEAST_WEIGHT, Selection } from '../../../src/tally/selection';

const study = (extra: Partial<StudyInput> = {}): StudyInput => ({
  schema: 'entasis.study/1',
  events: { files: ['a.csv'] },
  roles: { true: 't', reconstructed: 'r' },
  axes: { true: { from: 0, to: 10, bins: 5 }, reconstructed: { from: 0, to: 10, bins: 5 } },
  ...extra,
});
const number = (...values: number[]): Column => ({ as: 'number', values: Float64Array.from(values) });
const text = (labels: string[], ...codes: number[]): Column => ({ as: 'text', codes: Int32Array.from(codes), labels });
const batch = (...columns: Column[]): Batch => {
  const first = columns[0]!;
  const rows =
    first.as === 'number' ? first.values.length : first.as === 'text' ? first.codes.length : first.high.length;
  return {
    rows,
    columns,
    places: Float64Array.from({ length: rows }, (_, i) => i + 2),
    rejects: [],
    bytes: 0,
    placesPassed: rows + 1,
  };
};
const select = (input: StudyInput, ...columns: Column[]) => {
  const selection = new Selection(tallyPlan(parseStudy(input)), 3);
  const { events, rejects } = selection.select(batch(...columns), (place) => `a.csv:${place}`);
  return { selection, events, truth: [...events.truth.subarray(0, events.rows)], rejects };
};
const reasons = (rejects: { place: number; reason: string }[]) =>
  rejects.map(({ place, reason }) => `${place} ${reason}`);

describe('the selection of events', () => {
  it('takes a row without reconstructed value as lost where losses are recorded', () => {
    const { events, rejects } = select(study(), number(1, 2), number(1, NaN));
    expect([events.rows, events.reco[1], rejects.length]).toEqual([2, NaN, 0]);
  });

  it('rejects such a row where losses are not recorded', () => {
    const { rejects } = select(study({ lost: 'unrecorded' }), number(1, 2), number(1, NaN));
    expect(reasons(rejects)).toEqual(['3 no reconstructed value']);
  });

  it('rejects rows without true value, unless the study counts them as unmatched', () => {
    expect(reasons(select(study(), number(NaN, 1), number(4, 4)).rejects)).toEqual(['2 no true value']);
    const counted = select(study({ unmatched: 'count' }), number(NaN, 1, NaN), number(4, 4, NaN));
    expect(counted.truth).toEqual([NaN, 1]);
    expect(reasons(counted.rejects)).toEqual(['4 no true value']);
  });

  it('rejects infinite values and says which', () => {
    const { rejects } = select(study(), number(Infinity, 1), number(1, -Infinity));
    expect(reasons(rejects)).toEqual(['2 true value not finite', '3 reconstructed value not finite']);
    expect(rejects.map(({ value }) => value)).toEqual(['Infinity', '-Infinity']);
  });

  it('cuts before it rejects, joins cuts by and, and counts what passes each', () => {
    const cuts: StudyInput['cuts'] = [
      { column: 'q', is: '>=', value: 2 },
      { column: 'arm', is: 'in', value: ['left', 'top'] },
    ];
    const arm = text(['left', 'right', 'top'], 0, 1, 2, 0, -1);
    const { truth, selection } = select(
      study({ cuts }),
      number(1, 2, 3, NaN, 5),
      number(1, 1, 1, 1, 1),
      number(2, 3, 2, 1, 3),
      arm,
    );
    expect(truth).toEqual([1, 3]);
    expect([...selection.cutPassed]).toEqual([4, 3]);
    expect(selection.ledger).toMatchObject({ read: 5, cut: 3, rejected: 0 });
  });

  it.each([
    ['<', 2, [1]],
    ['<=', 2, [1, 2]],
    ['>', 2, [3]],
    ['>=', 2, [2, 3]],
    ['=', 2, [2]],
    ['!=', 2, [1, 3]],
    ['in', [1, 3], [1, 3]],
  ] as const)('a missing value satisfies no cut: q %s %j', (is, value, passed) => {
    const cuts = [{ column: 'q', is, value: value as never }];
    expect(select(study({ cuts }), number(1, 2, 3, 4), number(1, 1, 1, 1), number(1, 2, 3, NaN)).truth).toEqual(passed);
  });

  it('compares texts with = and !=', () => {
    const cut = (is: '=' | '!=') => study({ cuts: [{ column: 'arm', is, value: 'left' }] });
    const arm = text(['left', 'right'], 0, 1, -1);
    expect(select(cut('='), number(1, 2, 3), number(1, 1, 1), arm).truth).toEqual([1]);
    expect(select(cut('!='), number(1, 2, 3), number(1, 1, 1), arm).truth).toEqual([2]);
  });

  it('takes weights whose square is a number, zero and negative ones too, and rejects the rest', () => {
    const weights = number(0, -2, LARGEST_WEIGHT, LARGEST_WEIGHT * 1.01, LEAST_WEIGHT, LEAST_WEIGHT / 2, NaN, Infinity);
    const ones = number(...Array<number>(8).fill(1));
    const { rejects } = select(study({ roles: { true: 't', reconstructed: 'r', weight: 'w' } }), ones, ones, weights);
    expect(reasons(rejects)).toEqual([
      '5 weight out of range',
      '7 weight out of range',
      '8 no weight',
      '9 weight out of range',
    ]);
  });

  it('rejects rows without run label, and refuses more runs than it can keep apart', () => {
    const byRun = study({ roles: { true: 't', reconstructed: 'r', run: 'run' } });
    const ones = number(1, 1, 1, 1);
    expect(reasons(select(byRun, ones, ones, text(['7'], 0, -1, 0, 0)).rejects)).toEqual(['3 no run label']);
    expect(() => select(byRun, ones, ones, text(['a', 'b', 'c', 'd'], 0, 1, 2, 3))).toThrow(
      /^roles\.run: column "run" has more than 3 labels/,
    );
  });

  it('turns tags into indices and stops at a tag that is not listed, unless it is cut', () => {
    const axes: StudyInput['axes'] = {
      true: { tags: ['electron', 'pion'] },
      reconstructed: { from: 0, to: 1, bins: 2 },
    };
    const tags = text(['pion', 'electron', 'muon'], 0, 1, 2);
    expect(() => select(study({ axes }), tags, number(0, 0, 0))).toThrow(
      /^a\.csv:4: tag "muon" is not in axes\.true\.tags/,
    );
    const cut = select(study({ axes, cuts: [{ column: 't', is: '!=', value: 'muon' }] }), tags, number(0, 0, 0));
    expect(cut.truth).toEqual([1, 0]);
  });
});
