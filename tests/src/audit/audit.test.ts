import { describe, expect, it } from 'vitest';
import { auditOf } from '../../../src/audit/audit';
import type { AuditSources } from '../../../src/audit/deep-audit';
import { FLAG_IDS } from '../../../src/audit/flag';
import { referenceOf } from '../../../src/audit/reference';
import { fastest } from '../posterior/fastest';
import { inputOf, sampler } from './audited';

function sourcesOf(input: ReturnType<typeof inputOf>): AuditSources {
  const reference = referenceOf(input.study.reference, input.trueAxis, input.tally);
  return { reference, sampler };
}

const band = (columns: number, outcomes: number, events: number) =>
  Array.from({ length: columns }, (_, j) =>
    Array.from({ length: outcomes }, (_, k) => Math.round(events * Math.exp(-((((k - j) * 100) / columns) ** 2) / 18))),
  );
const axis = (bins: number) => ({ unit: 'MeV', from: 0, to: bins, bins });
const tags = { tags: ['e', 'pi', 'mu'] };

const COLUMN_MEASURES = [
  'acceptance',
  'bias',
  'drift',
  'effectiveEntries',
  'efficiency',
  'priorShare',
  'purity',
  'resolution',
  'slopeBias',
  'spillAbove',
  'spillBelow',
  'stability',
];

/** Measures of columns that rest on a reference spectrum or on sampled matrices. */
const REST = ['purity', 'resolution', 'slopeBias', 'drift'];

describe('the whole audit', () => {
  const studies = {
    plain: inputOf({ events: band(8, 9, 300) }, { axes: { true: axis(6), reconstructed: axis(6) } }),
    'of unequal axes': inputOf({ events: band(8, 6, 300) }, { axes: { true: axis(6), reconstructed: axis(3) } }),
    'of tags': inputOf({ events: band(3, 4, 300) }, { axes: { true: tags, reconstructed: tags } }),
    'of one column and one bin': inputOf(
      { events: band(3, 4, 50) },
      { axes: { true: axis(1), reconstructed: axis(1) } },
    ),
    'without recorded losses': inputOf(
      { events: band(8, 8, 300) },
      { axes: { true: axis(6), reconstructed: axis(6) }, lost: 'unrecorded' },
    ),
    'with empty columns': inputOf(
      { events: band(8, 9, 300).map((row, j) => (j % 3 ? row : row.map(() => 0))) },
      { axes: { true: axis(6), reconstructed: axis(6) } },
    ),
    'without any event': inputOf({ events: band(8, 9, 0) }, { axes: { true: axis(6), reconstructed: axis(6) } }),
    'of a prior of zero': inputOf(
      { events: band(8, 9, 300).map((row, j) => (j % 3 ? row : row.map(() => 0))) },
      { axes: { true: axis(6), reconstructed: axis(6) }, prior: { pseudoCount: 0 } },
    ),
    'of huge weights': inputOf(
      {
        events: band(8, 9, 300),
        weights: band(8, 9, 300).map((row) => row.map((n, k) => n * 1e120 * (1 + k))),
        squares: band(8, 9, 300).map((row) => row.map((n, k) => n * 1e240 * (1 + k) ** 2)),
      },
      { axes: { true: axis(6), reconstructed: axis(6) } },
    ),
    'of negative weights': inputOf(
      {
        events: band(8, 9, 300),
        weights: band(8, 9, 300).map((row, j) => row.map((n, k) => (k === j ? n : -0.1 * n))),
        squares: band(8, 9, 300),
      },
      { axes: { true: axis(6), reconstructed: axis(6) } },
    ),
    'with runs': inputOf(
      { events: band(8, 9, 300), runs: [band(8, 9, 150), band(8, 9, 150)] },
      { axes: { true: axis(6), reconstructed: axis(6) } },
    ),
  };

  for (const [name, input] of Object.entries(studies)) {
    it(`${name}: every measure is a finite number or absent with its reason, every flag says what it saw`, () => {
      const audit = auditOf(input, sourcesOf(input));
      expect(Object.keys(audit.measures.columns).sort()).toEqual(COLUMN_MEASURES);
      expect(Object.keys(audit.measures.bins).sort()).toEqual([
        'background',
        'dataVariance',
        'feedIn',
        'folded',
        'matrixVariance',
      ]);
      expect(Object.keys(audit.measures.matrix).sort()).toEqual(['resolvable', 'singularValues']);
      const { columns, bins, matrix } = audit.measures;
      for (const measure of Object.values({ ...columns, ...bins, ...matrix })) {
        if (measure.value === null) {
          expect((measure as { reason: string }).reason).not.toBe('');
          continue;
        }
        const unexplained = measure.value.filter((value) => value === null).length;
        expect((measure as { absent: unknown[] }).absent).toHaveLength(unexplained);
      }
      for (const flag of audit.flags) {
        expect(flag.evidence, flag.id).not.toBe('');
        expect(flag.advice === '', `${flag.id} ${flag.state}`).toBe(flag.state === 'clear');
        for (const number of [flag.value, flag.lower, flag.upper, flag.limit, flag.probability]) {
          if (number !== null) expect(Number.isFinite(number), flag.id).toBe(true);
        }
      }
      expect(JSON.stringify([audit.measures, audit.flags])).not.toMatch(/NaN|Infinity|undefined|∞/);
    });

    it(`${name}: one flag for each measure and place, in table order`, () => {
      const { flags } = auditOf(input, sourcesOf(input));
      const places = flags.map(({ id, column, bin }) => `${id} ${column} ${bin}`);
      expect(new Set(places).size).toBe(places.length);
      const order = flags.map(({ id }) => FLAG_IDS.indexOf(id));
      expect(order).toEqual([...order].sort((a, b) => a - b));
    });
  }

  it('without sources leaves out what rests on them, and nothing else', () => {
    const { measures, deep } = auditOf(studies.plain);
    expect(deep).toBeNull();
    expect(Object.keys(measures.columns)).not.toContain('purity');
    expect(Object.keys(measures.bins)).toEqual(['background']);
    const whole = auditOf(studies.plain, sourcesOf(studies.plain)).measures.columns;
    expect(measures.columns).toEqual(Object.fromEntries(Object.entries(whole).filter(([id]) => !REST.includes(id))));
  });

  it('is the same to the last digit when it is asked for again', () => {
    const again = (input: ReturnType<typeof inputOf>) => JSON.stringify(auditOf(input, sourcesOf(input)).flags);
    expect(again(studies['with runs'])).toBe(again(studies['with runs']));
  });

  it('100 columns of 103 outcomes with 10 runs take less than 2 s', () => {
    const runs = Array.from({ length: 10 }, () => band(100, 103, 100));
    const events = band(100, 103, 1000);
    const input = inputOf({ events, runs }, { axes: { true: axis(98), reconstructed: axis(100) } });
    expect(fastest(() => auditOf(input, sourcesOf(input)), 2)).toBeLessThan(2000);
  });
});
