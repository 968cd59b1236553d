import { mkdtempSync, rmSync, writeFileSync } from 'node:fs';
import { tmpdir } from 'node:os';
import { join } from 'node:path';
import { afterEach, beforeEach, describe, expect, it } from 'vitest';
import { Cancelled, InputError } from '../../../src/study/input-error';
import { parseStudy, type StudyInput } from '../../../src/study/study';
import { tallyFiles } from '../../../src/tally/tally-files';
import { tallyTable, type EventColumn } from '../../../src/tally/tally-table';

const STUDY: StudyInput = {
  schema: 'entasis.study/1',
  events: { files: ['*.csv'] },
  roles: { true: 't', reconstructed: 'r', weight: 'w', run: 'run', event: 'id' },
  cuts: [{ column: 'q', is: '>=', value: 2 }],
  axes: { true: { edges: [0, 1, 2] }, reconstructed: { edges: [0, 1, 2] } },
};
const study = parseStudy(STUDY);

/** Eight rows: two in one cell, one lost, one below, one cut, one without a true value, one that repeats an identity. */
const COLUMNS = {
  t: [0.5, 0.75, 1, 1.5, -1, 0.5, NaN, 1.25],
  r: [0.5, 0.25, NaN, 1.5, 2, 0.5, 1, 1],
  w: [1, 2, 1, 0.5, 1, 1, 1, 3],
  run: ['a', 'b', 'a', 'b', 'a', 'a', 'a', 'b'],
  id: [1, 2, 3, 4, 5, 6, 7, 4],
  q: [2, 3, 2, 2, 2, 1, 2, 2],
} satisfies Record<string, EventColumn>;

let folder: string;
beforeEach(() => (folder = mkdtempSync(join(tmpdir(), 'entasis-tally-'))));
afterEach(() => rmSync(folder, { recursive: true }));

function csv(from: number, to: number): string {
  const names = Object.keys(COLUMNS) as (keyof typeof COLUMNS)[];
  const rows = Array.from({ length: to - from }, (_, i) => names.map((name) => COLUMNS[name][from + i]).join(','));
  return `${names.join(',')}\n${rows.join('\n')}\n`;
}

describe('events in memory', () => {
  it('are tallied as by hand, with cut, rejected and repeated rows told', () => {
    const { tally, rejects } = tallyTable(study, COLUMNS);
    // Columns: below, [0, 1), [1, 2), above. Outcomes: below, [0, 1), [1, 2), above, lost.
    const events = [0, 0, 0, 1, 0, 0, 2, 0, 0, 0, 0, 0, 2, 0, 1, 0, 0, 0, 0, 0];
    expect([...tally.cells.events]).toEqual(events);
    expect(tally.cells.weights![6]).toBe(3);
    expect(tally.cells.squares![12]).toBe(0.25 + 9);
    expect(tally.runs!.labels).toEqual(['a', 'b']);
    expect(tally.ledger).toMatchObject({ read: 8, cut: 1, rejected: 1, tallied: 6, reasons: { 'no true value': 1 } });
    expect(rejects).toEqual([{ place: 7, column: 't', value: null, reason: 'no true value' }]);
    expect(tally.duplicates).toEqual({ identities: 1, rows: 1, examples: [['row 4', 'row 8']] });
  });

  it('give the tally that files with the same rows give, read in one thread', async () => {
    writeFileSync(join(folder, 'a.csv'), csv(0, 3));
    writeFileSync(join(folder, 'b.csv'), csv(3, 8));
    const rejected: string[] = [];
    const onReject = (file: string, { place }: { place: number }): void => void rejected.push(`${file}:${place}`);
    const tally = await tallyFiles(study, folder, { onReject });
    const examples = [['b.csv:2', 'b.csv:6']];
    const inMemory = tallyTable(study, COLUMNS).tally;
    expect(tally).toEqual({ ...inMemory, duplicates: { ...inMemory.duplicates, examples } });
    expect(rejected).toEqual(['b.csv:5']);
  });

  it('may be tags and typed arrays', () => {
    const tags = { tags: ['electron', 'muon'] };
    const species = parseStudy({
      ...STUDY,
      roles: { true: 't', reconstructed: 'r' },
      cuts: [],
      axes: { true: tags, reconstructed: { from: 0, to: 2, bins: 2 } },
    });
    const { tally } = tallyTable(species, { t: ['muon', 'electron', 'muon'], r: Float32Array.of(0.5, NaN, 1.5) });
    expect([...tally.cells.events]).toEqual([0, 0, 0, 0, 1, 0, 1, 1, 0, 0]);
  });

  it('are refused in one line where a column is absent, short, or of the wrong kind', () => {
    const { t: _, ...rest } = COLUMNS;
    expect(() => tallyTable(study, rest)).toThrow(/^columns\.t: there is no such column: /);
    expect(() => tallyTable(study, { ...COLUMNS, w: [1] })).toThrow(/^columns\.w: 1 rows where "t" has 8: /);
    expect(() => tallyTable(study, { ...COLUMNS, w: COLUMNS.run })).toThrow(/^columns\.w: texts where numbers/);
    expect(() => tallyTable(study, {})).toThrow(InputError);
  });
});

describe('files read in one thread', () => {
  it('end in Cancelled when asked to, and in one line where there is none', async () => {
    await expect(tallyFiles(study, folder)).rejects.toThrow(InputError);
    writeFileSync(join(folder, 'a.csv'), csv(0, 8));
    await expect(tallyFiles(study, folder, { signal: AbortSignal.abort() })).rejects.toThrow(Cancelled);
  });
});
