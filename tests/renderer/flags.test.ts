import { describe, expect, it } from 'vitest';
import { ReplicaCache } from '../../renderer/stages/matrix/replica-cache';
import { arrangeFlags } from '../../renderer/stages/audit/arrange-flags';
import { flagMarks, gravest } from '../../renderer/stages/matrix/flag-marks';
import type { Flag } from '../../src/audit/flag';

const flag = (extra: Partial<Flag>): Flag => ({
  id: 'thin',
  column: '[0, 1)',
  bin: null,
  state: 'flagged',
  value: 1,
  lower: null,
  upper: null,
  limit: 2,
  probability: null,
  evidence: '',
  advice: '',
  ...extra,
});

describe('replicas that were fetched', () => {
  it('are asked for once, and again after a failure', () => {
    const cache = new ReplicaCache(2, 10);
    expect(cache.ask(0, 3)).toEqual([0, 1, 2]);
    expect(cache.ask(1, 4)).toEqual([3]);
    cache.forget(2);
    expect(cache.ask(0, 4)).toEqual([2]);
  });

  it('are handed out as they came, and the oldest make room', () => {
    const cache = new ReplicaCache(2, 2);
    cache.ask(0, 3);
    cache.keep([0, 1], Float64Array.of(1, 2, 3, 4));
    expect([...cache.get(1)!]).toEqual([3, 4]);
    cache.keep([2], Float64Array.of(5, 6));
    expect(cache.get(0)).toBeNull();
    expect(cache.knows(0)).toBe(false);
    expect([...cache.get(2)!]).toEqual([5, 6]);
  });
});

describe('flags in pictures', () => {
  it('stand one a place, the graver for all', () => {
    const flags = [flag({ state: 'undecided' }), flag({ id: 'lossy', state: 'flagged' })];
    const marks = flagMarks(
      flags,
      () => 3,
      () => 50,
    );
    expect(marks).toHaveLength(1);
    expect(marks[0]).toMatchObject({ x: 50, state: 'flagged', places: [3] });
  });

  it('become one where places are too close to be told apart', () => {
    const flags = [0, 1, 8].map((i) => flag({ column: String(i), state: i === 8 ? 'flagged' : 'undecided' }));
    const marks = flagMarks(
      flags,
      ({ column }) => Number(column),
      (i) => i * 5,
    );
    expect(marks.map(({ state, places }) => [state, places])).toEqual([
      ['undecided', [0, 1]],
      ['flagged', [8]],
    ]);
  });

  it('leave out what is clear, without a place, or out of view', () => {
    const flags = [flag({ state: 'clear' }), flag({ column: null }), flag({ column: 'far' })];
    expect(
      flagMarks(
        flags,
        ({ column }) => (column === null ? null : 0),
        () => NaN,
      ),
    ).toEqual([]);
    expect(gravest([])).toBe('clear');
  });
});

describe('the list of flags', () => {
  const flags = [
    flag({ id: 'thin', column: 'b', probability: 0.99, evidence: '80 entries' }),
    flag({ id: 'lossy', column: 'a', state: 'undecided', probability: 0.4 }),
    flag({ id: 'lossy', column: 'b', state: 'undecided', probability: 0.7 }),
    flag({ id: 'lossy', column: 'c', state: 'clear' }),
  ];
  const plain = {
    id: '',
    words: '',
    order: 'kind' as const,
    place: (one: Flag) => one.column ?? '',
    title: (one: Flag) => one.id,
  };
  const shown = (extra: object) =>
    arrangeFlags(flags, { ...plain, ...extra }).map((group) => group.flags.map((one) => flags.indexOf(one)));

  it('is grouped by answer, the gravest first', () => {
    expect(arrangeFlags(flags, plain).map(({ state }) => state)).toEqual(['flagged', 'undecided', 'clear']);
    expect(shown({})).toEqual([[0], [1, 2], [3]]);
  });

  it('is filtered by kind and by words of title, place and evidence', () => {
    expect(shown({ id: 'lossy' })).toEqual([[], [1, 2], [3]]);
    expect(shown({ words: '80 thin' })).toEqual([[0], [], []]);
  });

  it('is sorted by place in the order of the matrix, or by probability', () => {
    expect(shown({ order: 'place' })).toEqual([[0], [2, 1], [3]]);
    expect(shown({ order: 'probability' })).toEqual([[0], [2, 1], [3]]);
  });
});
