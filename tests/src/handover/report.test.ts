import { describe, expect, it } from 'vitest';
import { FLAG_IDS, type Flag, type FlagId } from '../../../src/audit/flag';
import { axisBands, evenBands, windowBands } from '../../../src/handover/report/bands';
import { cellPicture } from '../../../src/handover/report/cell-picture';
import { FLAG_WORDS, flagLimit, flagValue, worstOf } from '../../../src/handover/report/flag-words';
import { markup, Markup, tableOf } from '../../../src/handover/report/markup';
import { planNext, sumOf } from '../../../src/handover/report/measure-next';
import { bandNamer, columnsInWords, edgeTexts } from '../../../src/handover/report/places';
import { cssString } from '../../../src/handover/report/style';
import { placeOn, ticksOn } from '../../../src/handover/report/ticks';
import { columnVerdicts } from '../../../src/handover/report/verdicts';
import { analyse } from '../../../src/handover/analyse';
import { eventsToPopulate } from '../../../src/audit/population';
import { resolveAxis } from '../../../src/study/study';
import { auditMade, inputOf } from '../audit/audited';

const axis = (edges: number[], spacing: 'linear' | 'log' = 'linear') =>
  resolveAxis({ label: 'Energy', unit: 'MeV', edges, spacing });
const TAGS = resolveAxis({ label: 'Species', tags: ['electron', 'pion', 'muon'] });

function flag(id: FlagId, more: Partial<Flag> = {}): Flag {
  const none = { bin: null, value: null, lower: null, upper: null, probability: null, evidence: '', advice: '' };
  return { id, column: 'a', state: 'flagged', limit: 1, ...none, ...more };
}

describe('markup', () => {
  it('escapes what a user wrote, and takes in markup as it is', () => {
    const hostile = `<script src="x">&'</script>`;
    expect(markup`<b title="${hostile}">${[hostile, markup`<i>${1}</i>`, null]}</b>`.text).toBe(
      '<b title="&lt;script src=&quot;x&quot;&gt;&amp;&#39;&lt;/script&gt;">&lt;script src=&quot;x&quot;&gt;&amp;&#39;&lt;/script&gt;<i>1</i></b>',
    );
  });

  it('shows a mark where a control character stood, and keeps tabs and line ends', () => {
    expect(markup`${'a\u0000b\u001b[1m\tc\nd'}`.text).toBe('a\ufffdb\ufffd[1m\tc\nd');
  });

  it('sets numeric columns of a table to the right, in its head too', () => {
    const { text } = tableOf(['Name', 'Events'], [['a', 3]], { numeric: [1] });
    expect(text).toContain('<th class="">Name</th><th class="number">Events</th>');
    expect(text).toContain('<td class="">a</td><td class="number">3</td>');
  });

  it('writes a title into a style sheet so that it can end neither string nor element', () => {
    const text = cssString('a"; } </style><script>\\');
    expect(text).toMatch(/^"[A-Za-z0-9 ,.;:()\\-]*"$/);
    // Every escape is a code point and a space: read back by the rule of CSS Syntax 3, 4.3.7, it is the title again.
    const read = text
      .slice(1, -1)
      .replace(/\\([0-9a-f]+) /g, (_, hex: string) => String.fromCodePoint(parseInt(hex, 16)));
    expect(read).toBe('a"; } </style><script>\\');
  });
});

describe('places in words', () => {
  it('names bins, outer bands and losses with the unit', () => {
    const name = bandNamer(axis([2, 4, 6]));
    expect([0, 1, 2, 3, 4].map(name)).toEqual(['below 2 MeV', '2 to 4 MeV', '4 to 6 MeV', '6 MeV and up', 'lost']);
    expect([0, 2, 3].map(bandNamer(TAGS))).toEqual(['electron', 'muon', 'lost']);
  });

  it('joins neighbours, outer bands with them, and counts them', () => {
    const wide = axis([2, 4, 6, 8, 10]);
    expect(columnsInWords(wide, [0, 1, 3])).toBe('below 4 MeV (2 columns), 6 to 8 MeV');
    expect(columnsInWords(wide, [2, 3, 5])).toBe('4 to 8 MeV (2 columns), 10 MeV and up');
    expect(columnsInWords(wide, [4, 5])).toBe('8 MeV and up (2 columns)');
    expect(columnsInWords(wide, [0, 1, 2, 3, 4, 5])).toBe('all 6 columns');
    expect(columnsInWords(TAGS, [0, 2])).toBe('electron, muon');
  });

  it('writes edges in the fewest digits that tell them apart, free of binary noise', () => {
    expect(edgeTexts(Float64Array.of(0.1 + 0.2, 0.4))).toEqual(['0.3', '0.4']);
    expect(edgeTexts(Float64Array.of(1.0001, 1.0002, 1.0003))).toEqual(['1.0001', '1.0002', '1.0003']);
  });
});

describe('ticks', () => {
  it('stand at whole steps of 1, 2 or 5, the ends included', () => {
    const texts = ticksOn({ kind: 'linear', from: 0, to: 0.3, low: 0, high: 100 }, 30).map(({ text }) => text);
    expect(texts).toEqual(['0', '0.1', '0.2', '0.3']);
    const places = ticksOn({ kind: 'linear', from: -10, to: 10, low: 100, high: 0 }, 20);
    expect(places.map(({ at }) => at)).toEqual([100, 75, 50, 25, 0]);
  });

  it('stand at powers of ten on a log scale, at 1, 2 and 5 where there are few', () => {
    const texts = (from: number, to: number) =>
      ticksOn({ kind: 'log', from, to, low: 0, high: 200 }, 25).map(({ text }) => text);
    expect(texts(1, 1e4)).toEqual(['1', '10', '100', '1\u202f000', '10\u202f000']);
    expect(texts(0.7, 30)).toEqual(['1', '2', '5', '10', '20']);
  });

  it('never place a value outside the scale', () => {
    const scale = { kind: 'log', from: 1, to: 100, low: 200, high: 0 } as const;
    expect([0.01, 1, 10, 100, 1e9].map((value) => placeOn(scale, value))).toEqual([200, 200, 100, 0, 0]);
  });
});

describe('bands of an axis', () => {
  it('lie true to scale in the window, with outer bands apart from it', () => {
    const { from, to } = axisBands(axis([0, 1, 4]), false, 400);
    const width = to.map((end, i) => end - from[i]!);
    expect(width[2]! / width[1]!).toBeCloseTo(3, 12);
    expect([from[0], to[3]]).toEqual([0, 400]);
    expect(from[1]!).toBeGreaterThan(to[0]!);
    expect(from[3]!).toBeGreaterThan(to[2]!);
  });

  it('put losses first, and are even on a log axis of equal ratios', () => {
    const { from, to, ticks } = axisBands(axis([1, 10, 100], 'log'), true, 400);
    expect(to[1]! - from[1]!).toBeCloseTo(to[2]! - from[2]!, 9);
    expect(from).toHaveLength(5);
    expect(from[4]).toBe(0);
    expect(ticks.map(({ text }) => text)).toEqual(expect.arrayContaining(['lost', 'below', 'above', '1', '10', '100']));
  });

  it('leave the outer ones out where bins alone are measured', () => {
    const all = axisBands(axis([0, 1, 4]), false, 400);
    const window = windowBands(axis([0, 1, 4]), 400);
    expect([...window.from]).toEqual([all.from[1], all.from[2]]);
    expect(window.ticks.map(({ text }) => text)).not.toContain('below');
  });
});

describe('a picture of cells', () => {
  const bands = evenBands(['a', 'b'], 0, 100, '');
  const draw = (level: (j: number, k: number) => number): string =>
    cellPicture({ name: 'cells', across: bands, up: bands, level, fills: ['white', 'grey', 'black'] }).text;

  it('draws each cell at its place, the first row at the foot, and none on paper', () => {
    const text = draw((j, k) => (j === 1 && k === 0 ? 2 : 0));
    expect(text).toContain(
      '<path fill="black" d="M50 100H100V50H50z"/>'.replace('M50 100H100V50H50z', 'M50 50H100V100H50z'),
    );
    expect(text).not.toContain('fill="grey"');
  });

  it('draws neighbours of one level as one rectangle', () => {
    expect(draw((j) => (j === 0 ? 1 : 0))).toContain('<path fill="grey" d="M0 0H50V100H0z"/>');
  });

  it('stays small for a fine matrix, and shows the fullest cell of those drawn together', () => {
    const fine = evenBands(
      Array.from({ length: 2000 }, (_, i) => String(i)),
      0,
      600,
      '',
    );
    const text = cellPicture({
      name: 'fine',
      across: fine,
      up: fine,
      level: (j, k) => (j === k ? 2 : 0),
      fills: ['white', 'grey', 'black'],
    }).text;
    expect(text.length).toBeLessThan(40_000);
    // 2000 cells in groups of 7: 286 rectangles on the diagonal.
    expect(text.match(/fill="black" d="([^"]*)"/)![1]!.match(/M/g)).toHaveLength(286);
  });
});

describe('words of flags', () => {
  it('there are for every flag', () => {
    expect(Object.keys(FLAG_WORDS).sort()).toEqual([...FLAG_IDS].sort());
  });

  it('give value, interval and limit in the same unit', () => {
    const lossy = flag('lossy', { value: 0.4, lower: 0.38, upper: 0.42, limit: 0.5 });
    expect([flagValue(lossy, 'MeV'), flagLimit(lossy, 'MeV')]).toEqual(['40.0 % (38.0 to 42.0)', '50 %']);
    const step = flag('non-monotone', { value: -3, lower: -5, upper: -1, limit: 0 });
    expect(flagValue(step, 'MeV')).toBe('−3.0 (−5.0 to −1.0) MeV');
    const resolved = flag('ill-conditioned', { value: 12, lower: 12, upper: 17, limit: 29 });
    expect(flagValue(resolved, '')).toBe('12 (12 to 17)');
    expect(flagValue(flag('lossy'), '')).toBe('–');
  });

  it('know which end of the values is the worse one', () => {
    const values = [0.3, 0.1, 0.2].map((value) => flag('lossy', { value }));
    expect(worstOf(values)!.value).toBe(0.1);
    expect(worstOf(values.map((one) => ({ ...one, id: 'spill-above' as const })))!.value).toBe(0.3);
    expect(worstOf([flag('lossy')])).toBeNull();
  });
});

describe('the verdict on a column', () => {
  const verdict = (...flags: Flag[]) => columnVerdicts(['a', 'b'], flags)[0]!.verdict;

  it('is sound where no flag is raised, whatever is said of bins and of the matrix', () => {
    expect(verdict(flag('thin', { state: 'clear' }))).toBe('sound');
    expect(verdict(flag('thin', { column: 'b' }))).toBe('sound');
    expect(verdict(flag('matrix-limited', { column: null, bin: 'a' }), flag('duplicate', { column: null }))).toBe(
      'sound',
    );
  });

  it('asks for care where the instrument tells little or an answer is undecided', () => {
    expect(verdict(flag('lossy'))).toBe('care');
    expect(verdict(flag('slope-bias', { state: 'undecided' }))).toBe('care');
  });

  it('is unsound where too little is known, or intervals may be too narrow', () => {
    for (const id of [
      'empty',
      'thin',
      'prior-led',
      'single-event',
      'negative-weight',
      'run-drift',
      'slope-bias',
    ] as const) {
      expect(verdict(flag('lossy'), flag(id)), id).toBe('unsound');
    }
  });
});

describe('what to measure next', () => {
  /** `below`, two bins, `above`; `below`, three bins, `above`, `lost`. */
  const events = [
    [40, 40, 0, 0, 0, 40],
    [0, 30, 10, 0, 0, 58],
    [0, 100, 4000, 900, 0, 600],
    [0, 0, 0, 60, 60, 120],
  ];

  it('asks for the events that lift thin and prior-led, and no fewer', () => {
    const flags = (added: number) => {
      const more = events.map((row, j) => (j === 1 ? row.map((n, k) => (k === 1 ? n + added : n)) : row));
      const raised = auditMade({ events: more }).flags.filter(
        ({ state, column }) => state === 'flagged' && column === '[0, 1)',
      );
      return raised.map(({ id }) => id).filter((id) => id === 'thin' || id === 'prior-led');
    };
    const needed = eventsToPopulate(inputOf({ events }))[1]!;
    expect(needed).toBe(2);
    expect(flags(needed)).toEqual([]);
    expect(flags(needed - 1)).toEqual(['thin']);
  });

  it('asks for nothing that no number of events brings', () => {
    expect(eventsToPopulate(inputOf({ events }, { limits: { 'prior-led': 0 } }))[2]).toBe(Infinity);
    expect(eventsToPopulate(inputOf({ events }))[2]).toBe(0);
  });

  it('takes of each column the most that any purpose asks for, and settles only what it can afford', () => {
    const input = inputOf({ events });
    const { reference, audit } = analyse(input.study, input.tally);
    const plan = planNext(input, reference, audit.deep!.influence, audit.flags);
    plan.needed.forEach((n, j) => expect(n).toBe(Math.max(plan.populate[j]!, plan.influence[j]!)));
    const settled = plan.settlements.filter(({ isAffordable }) => isAffordable);
    plan.all.forEach((n, j) => {
      expect(n).toBe(Math.max(plan.needed[j]!, ...settled.map(({ plan }) => plan.added![j]!)));
    });
    const now = sumOf(events.flat());
    expect(new Set(plan.settlements.map(({ isAffordable }) => isAffordable))).toEqual(new Set([true, false]));
    for (const { plan: one, isAffordable } of plan.settlements) {
      expect(isAffordable).toBe(one.total !== null && one.total <= now);
    }
    const undecided = audit.flags.filter(({ id, state }) => state === 'undecided' && id !== 'matrix-limited');
    expect(plan.settlements).toHaveLength(undecided.length);
  });
});

it('a rendered number is never read as markup', () => {
  expect(markup`${-0.5}${0}`).toEqual(new Markup('-0.50'));
});
