import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import { parseStudy, type StudyInput } from '../../../src/study/study';
import { ledgerBalances } from '../../../src/tally/ledger';
import { planOfText, planText, tallyPlan } from '../../../src/tally/plan';
import type { Events } from '../../../src/tally/selection';
import { TallySums } from '../../../src/tally/tally-sums';

interface Event {
  t: number;
  r: number;
  w: number;
  run: number;
}

const RUNS = ['10', '9', 'b'];
const planOf = (extra: Partial<StudyInput> = {}) =>
  tallyPlan(
    parseStudy({
      schema: 'entasis.study/1',
      events: { files: ['a.csv'] },
      roles: { true: 't', reconstructed: 'r', weight: 'w', run: 'run' },
      axes: { true: { edges: [0, 1, 4, 10] }, reconstructed: { edges: [0, 2, 8] } },
      ...extra,
    }),
  );

const eventsOf = (list: readonly Event[], weighted = true): Events => ({
  rows: list.length,
  truth: Float64Array.from(list, ({ t }) => t),
  reco: Float64Array.from(list, ({ r }) => r),
  weight: weighted ? Float64Array.from(list, ({ w }) => w) : null,
  run: weighted ? Int32Array.from(list, ({ run }) => run) : null,
  identity: null,
});

const tallied = (list: readonly Event[], plan = planOf()): TallySums => {
  const sums = new TallySums(plan);
  sums.add(eventsOf(list, plan.at.weight >= 0), RUNS);
  return sums;
};

const event = fc.record({
  t: fc.double({ min: -2, max: 12, noNaN: true }),
  r: fc.oneof(fc.double({ min: -2, max: 12, noNaN: true }), fc.constant(NaN)),
  w: fc.double({ min: -1e6, max: 1e6, noNaN: true }),
  run: fc.nat(RUNS.length - 1),
});
const events = fc.array(event, { maxLength: 60 });

describe('a tally', () => {
  it('leaves out weights and runs that the events have and the plan does not ask for', () => {
    const list = [
      { t: 0.5, r: 1, w: 7, run: 0 },
      { t: 0.6, r: 1, w: -2, run: 2 },
    ];
    const plan = planOf({ roles: { true: 't', reconstructed: 'r' } });
    const sums = new TallySums(plan);
    sums.add(eventsOf(list), RUNS);
    const tally = sums.finish(null);
    expect(tally).toEqual(tallied(list, plan).finish(null));
    expect([tally.cells.weights, tally.runs, tally.largestSquare]).toEqual([null, null, null]);
  });

  it('splits a bin at its midpoint, the midpoint in the upper half, and keeps outer columns in their first half', () => {
    const plan = planOf({ roles: { true: 't', reconstructed: 'r' } });
    const at = (t: number): Event => ({ t, r: 1, w: 1, run: 0 });
    const { halves, cells } = tallied([at(-5), at(1), at(2.4999), at(2.5), at(3.9), at(10), at(11)], plan).finish(null);
    const outcomes = 5;
    const half = (j: number, h: number): number => halves.events[(j * 2 + h) * outcomes + 1]!;
    expect([half(0, 0), half(2, 0), half(2, 1), half(4, 0), half(4, 1)]).toEqual([1, 2, 2, 2, 0]);
    expect(cells.events[2 * outcomes + 1]).toBe(4);
  });

  it('splits a bin of a log axis at its geometric midpoint', () => {
    const plan = planOf({
      roles: { true: 't', reconstructed: 'r' },
      axes: { true: { edges: [1, 100], spacing: 'log' }, reconstructed: { edges: [0, 20] } },
    });
    const { halves } = tallied(
      [9.99, 10, 10.01].map((t) => ({ t, r: 1, w: 1, run: 0 })),
      plan,
    ).finish(null);
    expect([halves.events[8 + 1], halves.events[12 + 1]]).toEqual([1, 2]);
  });

  it('conserves: every event is in one cell, its halves and its runs sum to it', () => {
    fc.assert(
      fc.property(events, (list) => {
        const { cells, halves, runs, ledger } = tallied(list).finish(null);
        const total = (values: Float64Array): number => values.reduce((a, b) => a + b, 0);
        expect([total(cells.events), total(halves.events), total(runs!.cells.events)]).toEqual(
          Array(3).fill(list.length),
        );
        expect(ledgerBalances({ ...ledger, read: list.length })).toBe(true);
      }),
    );
  });

  it('is to the byte the merge of the tallies of its parts, in any order', () => {
    fc.assert(
      fc.property(events, fc.array(fc.nat(2)), (list, to) => {
        const parts = [0, 1, 2].map((p) => list.filter((_, i) => (to[i] ?? 0) === p));
        const joined = new TallySums(planOf());
        for (const part of parts.reverse()) {
          joined.merge(TallySums.fromPlain(planOf(), structuredClone(tallied(part).toPlain(false))));
        }
        const whole = tallied(list);
        expect(joined.toPlain(true)).toEqual(whole.toPlain(true));
        expect(joined.finish(null)).toEqual(whole.finish(null));
      }),
    );
  });

  it('sorts runs as a reader expects them: numbers by value, then texts', () => {
    expect(tallied([0, 1, 2].map((run) => ({ t: 1, r: 1, w: 1, run }))).finish(null).runs!.labels).toEqual([
      '9',
      '10',
      'b',
    ]);
  });

  it('sets aside cells whose weight is not positive and says how much', () => {
    const list = [3, -5, 2].map((w, i) => ({ t: 0.5, r: i === 0 ? 1 : 5, w, run: 0 }));
    expect(tallied(list).finish(null).ledger.clamped).toEqual({ cells: 1, weight: -3 });
  });

  it('counts rows without true value by outcome where the study asks for them, never inside a column', () => {
    const plan = planOf({ unmatched: 'count' });
    const list = [NaN, 0.5, NaN].map((t) => ({ t, r: 5, w: 2, run: 0 }));
    const { unmatched, cells, ledger } = tallied(list, plan).finish(null);
    expect([unmatched!.events[2], unmatched!.weights![2], cells.events.reduce((a, b) => a + b, 0)]).toEqual([2, 4, 1]);
    expect([ledger.unmatched, ledger.tallied]).toEqual([2, 1]);
  });
});

it('a plan survives its text', () => {
  expect(planOfText(planText(planOf()))).toEqual(planOf());
});
