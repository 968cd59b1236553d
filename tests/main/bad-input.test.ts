import { chmodSync, existsSync, mkdirSync, readdirSync, writeFileSync } from 'node:fs';
import { gzipSync } from 'node:zlib';
import { afterAll, beforeEach, describe, expect, it } from 'vitest';
import { entasis, ownFolder } from './entasis';

const folder = ownFolder();
afterAll(folder.remove);

const plainStudy = () => ({
  schema: 'entasis.study/1',
  events: { files: ['events.csv'] },
  roles: { true: 't', reconstructed: 'r' } as Record<string, string>,
  axes: {
    true: { from: 0, to: 10, bins: 5 } as Record<string, unknown>,
    reconstructed: { from: 0, to: 10, bins: 5 } as Record<string, unknown>,
  },
  ensemble: { replicas: 10, seed: 1 } as Record<string, unknown>,
});
type Change = (study: any) => void;
const ROWS = Array.from({ length: 50 }, (_, i) => `${(i * 7) % 10}.5,${(i * 3) % 10}.25,${i}`);

let number = 0;
let here: string;
const file = (name: string): string => `${here}/${name}`;
const put = (name: string, content: string | Uint8Array): void => writeFileSync(file(name), content);
beforeEach(() => {
  here = folder.path(`case-${number++}`);
  mkdirSync(here);
  put('events.csv', ['t,r,n', ...ROWS, ''].join('\n'));
});

/** Builds a changed study and returns the one line of the error, `entasis: ` and the folder taken off. */
async function refusal(change: Change = () => undefined, ...args: string[]): Promise<string> {
  const study = plainStudy();
  change(study);
  put('x.study.json', JSON.stringify(study));
  return refused('build', file('x.study.json'), '--out', file('x.bundle'), ...args);
}

async function refused(...args: string[]): Promise<string> {
  const before = readdirSync(here).sort();
  const { status, out, err } = await entasis(...args);
  expect(status, err).toBe(2);
  expect(out).toBe('');
  expect(err).toMatch(/^entasis: [^\n]+\n$/);
  expect(err.split(': ').length, 'where: what: what to do').toBeGreaterThanOrEqual(4);
  expect(readdirSync(here).sort(), 'nothing is left behind').toEqual(before);
  return err.slice('entasis: '.length).trimEnd().replaceAll(`${here}/`, '');
}

describe('bad input ends with exit 2 and one line that says where, what and what to do, and leaves nothing behind', () => {
  it('a study that is no JSON, by line', async () => {
    put('x.study.json', '{\n  "schema": 1,,\n}');
    expect(await refused('build', file('x.study.json'))).toMatch(/^x\.study\.json:2: not valid JSON: /);
  });

  it('no study', async () => {
    expect(await refused('build', file('none.study.json'))).toMatch(/^none\.study\.json: no such file: /);
  });

  const cases: [string, Change, RegExp][] = [
    ['an unknown key', (s) => (s.colour = 1), /^x\.study\.json: colour: unknown key/],
    ['unsorted edges', (s) => (s.axes.true = { edges: [0, 3, 2] }), /^x\.study\.json: axes\.true\.edges\[2\]/],
    [
      'repeated edges',
      (s) => (s.axes.true = { edges: [0, 3, 3] }),
      /^x\.study\.json: axes\.true\.edges\[2\]: edge 3 repeats/,
    ],
    ['a missing column', (s) => (s.roles.true = 'energy'), /^events\.csv: no column "energy": the columns are t, r, n/],
    ['no file', (s) => (s.events.files = ['none.csv']), /^x\.study\.json: events\.files\[0\]: no file "none\.csv"/],
    ['negative replicas', (s) => (s.ensemble.replicas = -1), /^x\.study\.json: ensemble\.replicas: /],
    [
      'a prior of zero with unseen outcomes',
      (s) => (s.prior = { pseudoCount: 0 }),
      /^x\.study\.json: prior: a prior of zero, but column /,
    ],
  ];
  it.each(cases)('%s', async (_, change, message) => {
    expect(await refusal(change)).toMatch(message);
  });

  it('an empty file', async () => {
    put('events.csv', '');
    expect(await refusal()).toMatch(/^events\.csv: /);
  });

  it('a header without rows', async () => {
    put('events.csv', 't,r\n');
    expect(await refusal()).toMatch(/^events\.csv: a header but no rows: /);
  });

  it('all rows rejected, with the first of them', async () => {
    put('events.csv', 't,r\nx,1\ny,2\n');
    expect(await refusal()).toMatch(/^events\.csv:2: all of 2 rows were rejected or cut .*"x" in column "t"/);
  });

  it('all rows cut', async () => {
    expect(await refusal((s) => (s.cuts = [{ column: 'n', is: '>', value: 1000 }]))).toMatch(
      /^events\.csv: all of 50 rows were cut/,
    );
  });

  it('a wrong delimiter', async () => {
    put('events.csv', ['t;r', ...ROWS.map((row) => row.replaceAll(',', '|')), ''].join('\n'));
    expect(await refusal()).toMatch(/^events\.csv/);
  });

  it('a binary file', async () => {
    put(
      'events.csv',
      Uint8Array.from({ length: 4096 }, (_, i) => (i * 37) % 251),
    );
    expect(await refusal()).toMatch(/^events\.csv: /);
  });

  it('a truncated gzip, with the place of the damage', async () => {
    const whole = gzipSync(
      ['t,r', ...Array.from({ length: 20_000 }, (_, i) => `${(i * 7) % 10}.${i},${(i * 13) % 9}.${i}`), ''].join('\n'),
    );
    put('events.csv.gz', whole.subarray(0, whole.length - 2000));
    expect(await refusal((s) => (s.events.files = ['events.csv.gz']))).toMatch(/^events\.csv\.gz: .*byte \d+/);
  });

  it('a corrupt gzip', async () => {
    const whole = gzipSync(
      ['t,r', ...Array.from({ length: 20_000 }, (_, i) => `${(i * 7) % 10}.${i},${(i * 13) % 9}.${i}`), ''].join('\n'),
    );
    whole[Math.floor(whole.length / 2)]! ^= 0xff;
    put('events.csv.gz', whole);
    expect(await refusal((s) => (s.events.files = ['events.csv.gz']))).toMatch(/^events\.csv\.gz: .*byte \d+/);
  });

  it('ten thousand runs', async () => {
    put(
      'events.csv',
      ['t,r,run', ...Array.from({ length: 10_000 }, (_, i) => `${i % 10}.5,${i % 10}.5,run-${i}`), ''].join('\n'),
    );
    expect(await refusal((s) => (s.roles.run = 'run'))).toMatch(
      /^roles\.run: column "run" has more than 1000 labels: /,
    );
  });

  it('a tag that is not listed, by line', async () => {
    put('events.csv', 't,r\npion,1\nmuon,2\n');
    expect(await refusal((s) => (s.axes.true = { tags: ['pion', 'electron'] }))).toMatch(
      /^events\.csv:3: tag "muon" is not in axes\.true\.tags: /,
    );
  });

  it('a place that holds something else', async () => {
    put('x.bundle', 'precious');
    expect(await refusal()).toMatch(/^x\.bundle: is there and was not written by this command: /);
    mkdirSync(file('full.bundle'));
    put('full.bundle/notes.txt', 'precious');
    expect(await refusal(undefined, '--out', file('full.bundle'))).toMatch(/^full\.bundle: is there/);
    expect(existsSync(file('full.bundle/notes.txt'))).toBe(true);
  });

  it('a folder that cannot be written, even by root: a place inside a file', async () => {
    expect(await refusal(undefined, '--out', file('events.csv/x.bundle'))).toMatch(
      /^events\.csv\/x\.bundle: cannot be written \(\w+\): /,
    );
  });

  it.skipIf(process.getuid?.() === 0)('a folder that this user may not write to', async () => {
    mkdirSync(file('closed'));
    chmodSync(file('closed'), 0o500);
    expect(await refusal(undefined, '--out', file('closed/x.bundle'))).toMatch(
      /^closed\/x\.bundle: cannot be written \(EACCES\): /,
    );
  });

  it.skipIf(!existsSync('/dev/full'))('a disk without room', async () => {
    const { cannotWrite, writeWhole } = await import('../../src/handover/folder-in-the-making');
    const { openSync, closeSync } = await import('node:fs');
    const full = openSync('/dev/full', 'w');
    try {
      expect(() => writeWhole(full, new Uint8Array(1 << 16))).toThrow(/ENOSPC/);
      try {
        writeWhole(full, new Uint8Array(1));
      } catch (cause) {
        expect(cannotWrite('x.bundle', cause).message).toBe(
          'x.bundle: no space left: make room on the disk or choose another place',
        );
      }
    } finally {
      closeSync(full);
    }
  });

  it.each([
    [['build']],
    [['bogus']],
    [['build', 'a', 'b', 'c']],
    [['build', 'x', '--workers', '0']],
    [['build', 'x', '--speed']],
    [[]],
  ])('a usage error: %j', async (args) => {
    expect(await refused(...args)).toMatch(/^usage: .*: see entasis --help$/);
  });
});
