import { describe, expect, it } from 'vitest';
import { commandOf, keysOf, SHORTCUTS } from '../../renderer/bench/shortcuts';
import { mergeFields, roleOf, withRole } from '../../renderer/bench/fields';
import { priorKind, priorOf, PRIORS } from '../../renderer/bench/priors';
import { faultAt } from '../../renderer/bench/study-file.svelte';
import { parseCutValue, showCutValue } from '../../renderer/stages/events/cut-value';
import { flowsOf, reasonsOf, shared } from '../../renderer/stages/events/ledger-flow';
import { bandOrder, bandTitle, outcomeTitle } from '../../renderer/words/places';
import { fileStem } from '../../renderer/bench/choosing.svelte';
import { snippet } from '../../renderer/words/snippets';
import type { FileInspection } from '../../main/bridge';
import type { NumericAxis } from '../../src/study/axis';
import { emptyLedger } from '../../src/tally/ledger';

const axis: NumericAxis = {
  kind: 'numeric',
  label: '',
  unit: 'MeV',
  spacing: 'linear',
  edges: Float64Array.of(2, 4, 0.1 + 5.9),
};

describe('places in words', () => {
  it('names columns and outcomes with their unit, without binary noise', () => {
    expect([0, 1, 2, 3].map((i) => bandTitle(axis, i).replaceAll('\u202f', ' '))).toEqual([
      'below 2 MeV',
      '2 to 4 MeV',
      '4 to 6 MeV',
      'above 6 MeV',
    ]);
    expect(outcomeTitle(axis, 4)).toBe('lost');
  });

  it('orders outcomes as they stand in the picture: lost, below, bins, above', () => {
    expect(bandOrder(axis, true)).toEqual([4, 0, 1, 2, 3]);
    expect(bandOrder(axis, false)).toEqual([0, 1, 2, 3]);
  });
});

describe('the ledger as a picture', () => {
  const ledger = { ...emptyLedger(), read: 1000, cut: 100, rejected: 1, tallied: 899, reasons: { a: 1, b: 0 } };

  it('balances: the ways out are together exactly as wide as the bar of rows read', () => {
    const flows = flowsOf(ledger, false, 400);
    expect(flows.map(({ name }) => name)).toEqual(['cut', 'rejected', 'tallied']);
    expect(flows.at(-1)!.above.to).toBeCloseTo(400, 9);
    expect(flows.at(-1)!.below.to).toBeCloseTo(400, 9);
    expect(flows[0]!.above.to).toBeCloseTo(40, 9);
  });

  it('shows even one row, and nothing for none', () => {
    expect(shared([1e6, 1], 300)[1]).toBe(2);
    expect(shared([1e6, 0], 300)).toEqual([300, 0]);
    expect(shared([0, 0], 300)).toEqual([0, 0]);
  });

  it('counts unmatched rows where the study does', () => {
    expect(flowsOf(ledger, true, 400).map(({ name }) => name)).toContain('unmatched');
    expect(flowsOf({ ...ledger, unmatched: 3 }, false, 400).map(({ name }) => name)).toContain('unmatched');
  });

  it('lists reasons that happened', () => {
    expect(reasonsOf(ledger)).toEqual([{ reason: 'a', rows: 1 }]);
  });
});

describe('cuts', () => {
  it('take a number where the text reads as one, a list for "in"', () => {
    expect(parseCutValue(' \u22122.5 ', '>=')).toBe(-2.5);
    expect(parseCutValue('good', '=')).toBe('good');
    expect(parseCutValue('1, 2,3', 'in')).toEqual([1, 2, 3]);
    expect(showCutValue(['a', 'b'])).toBe('a, b');
  });
});

describe('fields and roles', () => {
  const inspection = (missing: number, least: number, labels: string[] | null) =>
    ({
      facts: {
        rows: 10,
        columns: [{ name: 'e', type: 'number', missing, nonFinite: 0, least, greatest: least + 1, labels }],
      },
      sketches: [{ name: 'e', histogram: null, labels: null }],
    }) as unknown as FileInspection;

  it('are summed over the files', () => {
    const [field] = mergeFields([inspection(1, 5, ['a']), inspection(2, -3, ['b'])], null);
    expect(field).toMatchObject({ missing: 3, rows: 20, files: 2, least: -3, greatest: 6, labels: ['a', 'b'] });
  });

  it('give a role to one field and a field one role', () => {
    const roles = { true: 'a', reconstructed: 'b', weight: 'c' };
    expect(withRole(roles, 'b', 'true')).toEqual({ true: 'b', reconstructed: '', weight: 'c' });
    expect(withRole(roles, 'c', null)).toEqual({ true: 'a', reconstructed: 'b' });
    expect(roleOf(roles, 'c')).toBe('weight');
    expect(roleOf(roles, 'x')).toBeNull();
  });
});

describe('shortcuts', () => {
  const press = (key: string, extra: object = {}) => ({
    key,
    ctrlKey: false,
    metaKey: false,
    altKey: false,
    shiftKey: false,
    ...extra,
  });

  it('follow the system: Ctrl, or Cmd on macOS', () => {
    expect(commandOf(press('s', { ctrlKey: true }), false)).toBe('save');
    expect(commandOf(press('s', { metaKey: true }), true)).toBe('save');
    expect(commandOf(press('s', { ctrlKey: true }), true)).toBeNull();
    expect(commandOf(press('S', { ctrlKey: true, shiftKey: true }), false)).toBe('save-as');
    expect(commandOf(press('s'), false)).toBeNull();
  });

  it('reach every stage by Alt and a digit too', () => {
    expect(commandOf(press('3', { altKey: true }), false)).toBe('stage-3');
    expect(commandOf(press('6', { altKey: true }), false)).toBeNull();
  });

  it('are told by the keys of the system, and no two are the same', () => {
    const save = SHORTCUTS.find(({ command }) => command === 'save-as')!;
    expect(keysOf(save, false)).toBe('Ctrl Shift S');
    expect(keysOf(save, true)).toBe('\u21e7\u2318S');
    expect(new Set(SHORTCUTS.map((one) => keysOf(one, false))).size).toBe(SHORTCUTS.length);
  });
});

describe('priors', () => {
  it('are told apart by what they say, and each kind makes a prior of its kind', () => {
    for (const { kind } of PRIORS) expect(priorKind(priorOf(kind, { pseudoCount: 0.5 }))).toBe(kind);
    expect(priorKind({ pseudoCount: 0.3 })).toBe('count');
  });

  it('keep an own number', () => {
    expect(priorOf('count', { pseudoCount: 0.3 })).toEqual({ pseudoCount: 0.3 });
  });
});

describe('faults in place', () => {
  const fault = { where: 'cuts[1].value', what: 'x', remedy: 'y' };
  it('stand at the path they name and at those around it', () => {
    expect(faultAt(fault, 'cuts[1]')).toBe(fault);
    expect(faultAt(fault, 'cuts[1].value')).toBe(fault);
    expect(faultAt(fault, 'cuts[10]')).toBeNull();
    expect(faultAt({ ...fault, where: 'cuts[10]' }, 'cuts[1]')).toBeNull();
    expect(faultAt(null, 'cuts')).toBeNull();
  });
});

describe('names of files', () => {
  it('are plain on every system', () => {
    expect(fileStem('Tagged photons, spring: #3')).toBe('tagged-photons-spring-3');
    expect(fileStem('***')).toBe('entasis');
  });

  it('stand quoted in the lines that load a bundle', () => {
    for (const language of ['Python', 'R', 'Julia'] as const) {
      expect(snippet(language, 'C:\\data\\a "b".bundle')).toContain('"C:\\\\data\\\\a \\"b\\".bundle"');
    }
  });
});
