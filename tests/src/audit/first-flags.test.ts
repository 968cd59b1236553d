import { describe, expect, it } from 'vitest';
import { auditOf } from '../../../src/audit/audit';
import { auditMade, flagOf, inputOf } from './audited';

/** below, [0, 1), [1, 2), above; outcomes below, three bins, above, lost. */
const CELLS = [
  [5, 40, 5, 0, 0, 50],
  [10, 800, 180, 5, 0, 5],
  [0, 3, 30, 20, 40, 7],
  [0, 0, 0, 0, 0, 0],
];

describe('the first flags', () => {
  const audit = auditMade({ events: CELLS });

  it('there is one for each measure and column, clear ones included', () => {
    const ids = ['empty', 'thin', 'prior-led', 'lossy', 'spill-below', 'spill-above', 'single-event'] as const;
    for (const id of ids) {
      const columns = audit.flags.filter((flag) => flag.id === id).map((flag) => flag.column);
      expect(columns).toEqual(['below', '[0, 1)', '[1, 2)', 'above']);
    }
    for (const flag of audit.flags) {
      expect(flag.evidence).not.toBe('');
      expect(flag.advice === '').toBe(flag.state === 'clear');
      expect(JSON.stringify(flag)).not.toMatch(/NaN|Infinity|undefined/);
    }
  });

  it('empty: a column without events, with the number that would make it neither thin nor prior-led', () => {
    expect(flagOf(audit, 'empty', 'above')).toMatchObject({ state: 'flagged', value: 0, probability: null });
    expect(flagOf(audit, 'empty', 'above').advice).toContain('about 100 events');
    expect(flagOf(audit, 'empty', '[0, 1)')).toMatchObject({
      state: 'clear',
      value: 1000,
      evidence: '1\u202f000 events',
    });
  });

  it('thin: effective entries below the limit, not at it', () => {
    expect(flagOf(audit, 'thin', 'below')).toMatchObject({ state: 'clear', value: 100, limit: 100 });
    const few = auditMade({ events: CELLS.map((row, j) => (j === 0 ? [5, 39, 5, 0, 0, 50] : row)) });
    expect(flagOf(few, 'thin', 'below')).toMatchObject({ state: 'flagged', value: 99, probability: null });
    expect(flagOf(few, 'thin', 'below').advice).toContain('about 1 more event ');
  });

  it('prior-led: the prior share, and the events that bring it to the limit', () => {
    // 3 pseudo-counts: 3 / (3 + n) is 0.1 at 27.
    const led = auditMade({ events: CELLS.map((row, j) => (j === 0 ? [0, 20, 0, 0, 0, 0] : row)) });
    const flag = flagOf(led, 'prior-led', 'below');
    expect(flag).toMatchObject({ state: 'flagged', value: 3 / 23 });
    expect(flag.advice).toContain('about 7 more events');
    expect(flagOf(audit, 'prior-led', 'below')).toMatchObject({ state: 'clear', value: 3 / 103 });
    expect(flagOf(audit, 'prior-led', 'above')).toMatchObject({ state: 'flagged', value: 1 });
  });

  it('lossy: the posterior probability of an efficiency below the limit gives the answer', () => {
    const state = (lost: number) => {
      const row = [0, 200 - lost, 0, 0, 0, lost];
      return flagOf(auditMade({ events: [row, ...CELLS.slice(1)] }), 'lossy', 'below');
    };
    expect(state(10)).toMatchObject({ state: 'clear', advice: '' });
    expect(state(100).state).toBe('undecided');
    expect(state(190).state).toBe('flagged');
    // Beta(lost + 1/2, 200 - lost + 5/2), P(p_lost > 1/2), by SciPy 1.17 beta.sf(0.5, 95.5, 107.5).
    expect(state(95).probability).toBeCloseTo(0.19927474636539, 12);
    expect(state(95).evidence).toMatch(/efficiency 5\d\.\d % \(\d\d\.\d to \d\d\.\d\): 95 of 200 events lost/);
    expect(state(95).advice).toMatch(
      /about 2\u202f800 more events .* as clear if the share stays at .*; they would not flag it/,
    );
    expect(state(190).advice).toContain('more calibration events will not lift it');
  });

  it('lossy: absent with its reason where losses are not recorded', () => {
    const unrecorded = auditMade({ events: CELLS.map((row) => row.slice(0, 5)) }, { lost: 'unrecorded' });
    expect(unrecorded.flags.filter(({ id }) => id === 'lossy')).toEqual([]);
    expect(unrecorded.measures.columns.efficiency).toEqual({
      value: null,
      reason: 'losses are not recorded, so efficiency is not measurable',
    });
    expect(unrecorded.measures.columns.acceptance!.value).toHaveLength(4);
  });

  it('spill: below and above the window, with its edge in the unit of the axis', () => {
    expect(flagOf(audit, 'spill-above', '[1, 2)')).toMatchObject({ state: 'flagged', limit: 0.05 });
    expect(flagOf(audit, 'spill-above', '[1, 2)').evidence).toContain('at or above 3 MeV: 40 of 100 events');
    expect(flagOf(audit, 'spill-below', '[0, 1)')).toMatchObject({ state: 'clear' });
    expect(flagOf(audit, 'spill-below', 'below')).toMatchObject({ state: 'undecided' });
    expect(flagOf(audit, 'spill-below', '[1, 2)')).toMatchObject({ state: 'clear', lower: 0 });
  });

  it('a column without events is undecided about every share, whatever its prior says', () => {
    for (const id of ['lossy', 'spill-below', 'spill-above'] as const) {
      const flag = flagOf(audit, id, 'above');
      expect(flag.state).toBe('undecided');
      expect(flag.advice).toMatch(/at least \S+ events? in this column, none of them beyond the limit/);
    }
  });

  it('single-event: the largest part of one event in the squared weight', () => {
    expect(flagOf(audit, 'single-event', '[0, 1)')).toMatchObject({ state: 'clear', value: 0.001 });
    const few = auditMade({ events: [[0, 9, 0, 0, 0, 0], [0, 10, 0, 0, 0, 0], ...CELLS.slice(2)] });
    expect(flagOf(few, 'single-event', 'below')).toMatchObject({ state: 'flagged', value: 1 / 9 });
    expect(flagOf(few, 'single-event', 'below').advice).toContain('about 1 more event ');
    expect(flagOf(few, 'single-event', '[0, 1)').state).toBe('clear');
    expect(flagOf(few, 'single-event', 'above')).toMatchObject({ state: 'clear', value: 0 });
  });

  it('tag axes have no spill, and say why', () => {
    const tags = { true: { tags: ['electron', 'pion'] }, reconstructed: { tags: ['e', 'pi'] } };
    const made = auditMade(
      {
        events: [
          [90, 5, 5],
          [10, 80, 10],
        ],
      },
      { axes: tags },
    );
    expect(made.flags.filter(({ id }) => id.startsWith('spill'))).toEqual([]);
    expect(made.measures.columns.spillBelow).toMatchObject({ value: null, reason: expect.stringContaining('tags') });
    expect(flagOf(made, 'lossy', 'pion').state).toBe('clear');
  });

  it('a column without posterior is undecided with no value, and no measure of it is a number', () => {
    const made = auditMade({ events: [[0, 0, 0, 0, 0, 0], ...CELLS.slice(1)] }, { prior: { pseudoCount: 0 } });
    expect(flagOf(made, 'lossy', 'below')).toMatchObject({ state: 'undecided', value: null, probability: null });
    const efficiency = made.measures.columns.efficiency!;
    expect(efficiency.value![0]).toBeNull();
    expect(efficiency).toMatchObject({
      absent: [
        { place: 'below', reason: 'no events and a prior of zero' },
        { place: 'above', reason: 'no events and a prior of zero' },
      ],
    });
    expect(JSON.stringify(made)).not.toMatch(/NaN|Infinity/);
  });

  it('efficiency and acceptance are those of the Beta posterior, one-sided where nothing was lost', () => {
    const { efficiency, acceptance } = audit.measures.columns;
    expect(efficiency!.value![1]).toBeCloseTo(997.5 / 1003, 14);
    expect(acceptance!.value![1]).toBeCloseTo(986.5 / 1003, 14);
    const none = auditMade({ events: [[0, 50, 50, 0, 0, 0], ...CELLS.slice(1)] });
    expect(none.measures.columns.efficiency).toMatchObject({
      upper: [1, expect.any(Number), expect.any(Number), expect.any(Number)],
    });
  });
});

describe('flags of weights and of the list', () => {
  const events = [
    [0, 3, 4, 0, 0, 0],
    [0, 50, 50, 0, 0, 0],
    [0, 50, 50, 0, 0, 0],
    [0, 50, 50, 0, 0, 0],
  ];
  const weights = events.map((row, j) => (j === 0 ? [0, -1.2, 4, 0, 0, 0] : row));
  const squares = events.map((row, j) => (j === 0 ? [0, 5.3, 4, 0, 0, 0] : row));

  it('negative-weight: a cell whose weight is not positive, with how far below zero it is', () => {
    const audit = auditMade({ events, weights, squares });
    const flag = flagOf(audit, 'negative-weight', 'below');
    expect(flag).toMatchObject({ state: 'flagged', value: 1, probability: null });
    expect(flag.evidence).toBe('[0, 1) MeV: weight \u22121.2 ± 2.3 from 3 events');
    // 1.2 is 0.52 of its sd: (2 / 0.521)^2 - 1 times the 7 events of the column is 96.06.
    expect(flag.advice).toContain('about 100 more events');
    expect(flagOf(audit, 'negative-weight', '[0, 1)')).toMatchObject({ state: 'clear', value: 0 });
  });

  it('negative-weight: beyond two standard deviations no number of events helps', () => {
    const [just, beyond] = [4.62, 4.6].map((size) => {
      const row = [0, -size, 4, 0, 0, 0];
      return flagOf(auditMade({ events, weights: [row, ...weights.slice(1)], squares }), 'negative-weight', 'below');
    });
    expect(just!.advice).toContain('correct the weights');
    expect(beyond!.advice).toContain('more event');
    const zero = auditMade({ events, weights: [[0, 0, 4, 0, 0, 0], ...weights.slice(1)], squares });
    expect(flagOf(zero, 'negative-weight', 'below').advice).toContain('tells nothing of its sign');
  });

  it('negative-weight: none without weights', () => {
    expect(auditMade({ events }).flags.some(({ id }) => id === 'negative-weight')).toBe(false);
  });

  it('single-event: one event of weight 10 among 100 of weight 1', () => {
    const input = inputOf({
      events: [[0, 51, 50, 0, 0, 0], ...events.slice(1)],
      weights: [[0, 60, 50, 0, 0, 0], ...events.slice(1)],
      squares: [[0, 150, 50, 0, 0, 0], ...events.slice(1)],
    });
    input.tally.largestSquare = Float64Array.of(100, 1, 1, 1);
    const flag = flagOf(auditOf(input), 'single-event', 'below');
    expect(flag).toMatchObject({ state: 'flagged', value: 0.5 });
    // 100 / 0.1 = 1000 squared weight needed, 200 there.
    expect(flag.advice).toContain('about 800 more events');
  });

  it('duplicate: of the list as a whole, absent where no id is read', () => {
    const input = inputOf({ events });
    expect(auditOf(input).flags.some(({ id }) => id === 'duplicate')).toBe(false);
    input.tally.duplicates = { identities: 0, rows: 0, examples: [] };
    expect(flagOf(auditOf(input), 'duplicate', null)).toMatchObject({ state: 'clear', value: 0, advice: '' });
    input.tally.duplicates = { identities: 3, rows: 4, examples: [['a.csv:3', 'a.csv:19']] };
    const flag = flagOf(auditOf(input), 'duplicate', null);
    expect(flag).toMatchObject({ state: 'flagged', value: 4, column: null, bin: null });
    expect(flag.evidence).toBe('3 event ids repeat, 4 rows too many, first a.csv:3 and a.csv:19');
    expect(flag.advice).toContain('take the 4 rows out');
  });
});
