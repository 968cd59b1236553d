import { mkdirSync, readFileSync, readdirSync, statSync, writeFileSync } from 'node:fs';
import { join } from 'node:path';
import { afterAll, beforeAll, describe, expect, it } from 'vitest';
import { PURPOSE, streamOf } from '../../src/numerics/random';
import { entasis, ownFolder } from './entasis';

const folder = ownFolder();
const FILES = 5;
const study = folder.path('parts.study.json');
const part = (name: string): string => folder.path(`${name}.part`);

function contents(path: string): Record<string, string> {
  const names = readdirSync(path, { recursive: true })
    .map(String)
    .filter((name) => statSync(join(path, name)).isFile());
  return Object.fromEntries(names.sort().map((name) => [name, readFileSync(join(path, name), 'base64')]));
}

async function ok(...args: string[]): Promise<string> {
  const { status, err, out } = await entasis(...args);
  expect(status, err).toBe(0);
  return out;
}

beforeAll(async () => {
  mkdirSync(folder.path('runs'));
  const stream = streamOf(1, PURPOSE.test, 0, 0);
  for (let f = 0; f < FILES; f++) {
    const rows = Array.from({ length: 800 }, (_, i) => {
      const t = 12 * stream.uniform() - 1;
      const r = stream.uniform() < 0.1 ? '' : (t + stream.normal()).toFixed(4);
      // Weights over many decades, some negative: sums that rounding would spoil.
      const w = (stream.uniform() < 0.1 ? -1 : 1) * Math.exp(8 * stream.normal());
      // The first five rows of the last file repeat run and event of the first file; ids begin anew in every run.
      const run = f === 4 && i < 5 ? i % 3 : f * 3 + (i % 3);
      return `${t.toFixed(5)},${r},${w},${run},${i}`;
    });
    rows.splice(100, 0, 'x,1,1,1,1', '1,2');
    writeFileSync(folder.path(`runs/${f}.csv`), ['t,r,w,run,id', ...rows, ''].join('\n'));
  }
  writeFileSync(
    study,
    JSON.stringify({
      schema: 'entasis.study/1',
      events: { files: ['runs/*.csv'] },
      roles: { true: 't', reconstructed: 'r', weight: 'w', run: 'run', event: 'id' },
      axes: { true: { from: 0, to: 10, bins: 6 }, reconstructed: { edges: [-1, 2, 3.5, 4, 9] } },
      ensemble: { replicas: 70, seed: 3 },
    }),
  );
  await ok('tally', study, '--out', part('whole'));
  for (let f = 0; f < FILES; f++)
    await ok('tally', study, '--files', `runs/${f}.csv`, '--out', part(String(f)), '--workers', '1');
});
afterAll(folder.remove);

describe('parts of a tally', () => {
  it.each([['01234'], ['43210'], ['20413']])('combine to the bytes of the whole in the order %s', async (order) => {
    await ok('combine', ...[...order].map(part), '--out', part('joined'));
    expect(contents(part('joined'))).toEqual(contents(part('whole')));
  });

  it('combine in steps, too', async () => {
    await ok('combine', part('3'), part('0'), '--out', part('a'));
    await ok('combine', part('1'), part('4'), part('2'), '--out', part('b'));
    await ok('combine', part('b'), part('a'), '--out', part('joined'));
    expect(contents(part('joined'))).toEqual(contents(part('whole')));
  });

  it('build the bundle that the events themselves build', async () => {
    await ok('build', study, '--out', folder.path('events.bundle'));
    await ok('build', study, '--from', part('whole'), '--out', folder.path('whole.bundle'));
    await ok('build', study, '--from', ...[...'31420'].map(part), '--out', folder.path('parts.bundle'));
    expect(contents(folder.path('whole.bundle'))).toEqual(contents(folder.path('events.bundle')));
    expect(contents(folder.path('parts.bundle'))).toEqual(contents(folder.path('events.bundle')));
    expect(JSON.parse(await ok('verify', folder.path('events.bundle'), '--json')).holds).toBe(true);
  });

  it('find event ids that repeat across parts, by file and line', async () => {
    const { duplicates } = JSON.parse(readFileSync(folder.path('parts.bundle/manifest.json'), 'utf8'));
    expect(duplicates).toMatchObject({ identities: 5, rows: 5 });
    expect(duplicates.examples[0]).toEqual(['runs/0.csv:2', 'runs/4.csv:2']);
    const flags = JSON.parse(readFileSync(folder.path('parts.bundle/flags.json'), 'utf8')) as {
      id: string;
      state: string;
    }[];
    expect(flags.find(({ id }) => id === 'duplicate')?.state).toBe('flagged');
  });

  it('are refused when one is missing, named twice, damaged, or of another study', async () => {
    const refused = async (...args: string[]): Promise<string> => {
      const { status, err } = await entasis(...args);
      expect(status).toBe(2);
      return err;
    };
    expect(await refused('build', study, '--from', part('0'), part('1'), '--out', folder.path('x'))).toMatch(
      /runs\/2\.csv is in no part/,
    );
    expect(await refused('combine', part('0'), part('whole'), '--out', folder.path('x'))).toMatch(
      /runs\/0\.csv is in .*0\.part too/,
    );
    const other = folder.path('other.study.json');
    writeFileSync(other, readFileSync(study, 'utf8').replace('"bins":6', '"bins":5'));
    expect(await refused('build', other, '--from', part('whole'), '--out', folder.path('x'))).toMatch(
      /are not those of the study/,
    );
    const array = join(part('4'), 'halves-events.npy');
    const bytes = readFileSync(array);
    bytes[bytes.length - 1]! ^= 1;
    writeFileSync(array, bytes);
    expect(await refused('combine', part('4'), '--out', folder.path('x'))).toMatch(
      /halves-events\.npy: its hash is not as it was written/,
    );
  });
});
