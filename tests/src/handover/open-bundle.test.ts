import { execFileSync } from 'node:child_process';
import { readFileSync, rmSync, truncateSync, writeFileSync } from 'node:fs';
import { join } from 'node:path';
import { afterEach, beforeEach, describe, expect, it } from 'vitest';
import { npyHeader, readNpy } from '../../../src/handover/npy';
import { arrayPath, openBundle, readCells, replicaBlocks } from '../../../src/handover/open-bundle';
import { InputError } from '../../../src/study/input-error';
import { makeBundle } from './make-bundle';

let folder: string;
beforeEach(async () => void (folder = await makeBundle({ replicas: 9 })));
afterEach(() => rmSync(folder, { recursive: true }));

/** The one line a fault ends in. */
function fault(): string {
  try {
    openBundle(folder);
  } catch (error) {
    expect(error).toBeInstanceOf(InputError);
    return (error as Error).message.replaceAll(folder, 'B');
  }
  throw new Error('the bundle was opened');
}

function editManifest(change: (manifest: Record<string, unknown>) => void): void {
  const path = join(folder, 'manifest.json');
  const manifest = JSON.parse(readFileSync(path, 'utf8')) as Record<string, unknown>;
  change(manifest);
  writeFileSync(path, JSON.stringify(manifest));
}

describe('a bundle', () => {
  it('opens with its names, axes and arrays', () => {
    const bundle = openBundle(folder);
    expect(bundle.columns).toHaveLength(5);
    expect(bundle.outcomes.at(-1)).toBe('lost');
    expect(bundle.axes.true).toMatchObject({ kind: 'numeric', unit: 'MeV' });
    expect(bundle.replicas).toBe(9);
    expect(readCells(bundle, 'tally/counts')).toEqual(readNpy(arrayPath(folder, 'tally/counts')).values);
  });

  it('gives its replicas in blocks that together are the file', () => {
    const bundle = openBundle(folder);
    const all = readNpy(arrayPath(folder, 'replicas')).values;
    const seen = [...replicaBlocks(bundle, 2, 8)].flatMap(({ values }) => [...values]);
    expect(seen).toEqual([...all.subarray(2 * 35, 8 * 35)]);
    expect([...replicaBlocks(bundle, 3, 3)]).toEqual([]);
  });

  it('reads an ensemble larger than a block in several blocks of bounded size', async () => {
    const axes = { true: { from: 0, to: 1, bins: 98 }, reconstructed: { from: 0, to: 1, bins: 97 } };
    const wide = openBundle(await makeBundle({ replicas: 130, axes }));
    const blocks = [...replicaBlocks(wide)];
    expect(blocks.map((block) => block.count)).toEqual([52, 52, 26]);
    expect(blocks.map((block) => block.first)).toEqual([0, 52, 104]);
    expect(Math.max(...blocks.map((block) => block.values.byteLength))).toBeLessThanOrEqual(4 * 2 ** 20);
    rmSync(wide.folder, { recursive: true });
  });
});

describe('a damaged or hostile bundle ends in one line:', () => {
  it('no bundle at all', () => {
    rmSync(join(folder, 'manifest.json'));
    expect(fault()).toBe('B/manifest.json: no such file: name a bundle folder, as entasis build writes it');
  });

  it('a manifest that is no JSON, of another schema, or without names', () => {
    writeFileSync(join(folder, 'manifest.json'), '{"schema": ');
    expect(fault()).toMatch(/^B\/manifest\.json:1: not valid JSON: /);
    writeFileSync(join(folder, 'manifest.json'), '[]');
    expect(fault()).toMatch(/^B\/manifest\.json:/);
  });

  it('a manifest of another schema', () => {
    editManifest((manifest) => (manifest['schema'] = 'entasis.bundle/99'));
    expect(fault()).toMatch(/^B\/manifest\.json: schema: /);
  });

  it('names that do not fit the arrays', () => {
    editManifest((manifest) => (manifest['columns'] as string[]).pop());
    expect(fault()).toMatch(/^B\/manifest\.json: arrays\.tally\/counts\.npy: shape \(5, 7\) of \[column, outcome\] /);
  });

  it('a manifest that reaches outside the folder', () => {
    for (const name of ['../a.npy', '/etc/a.npy', 'tally/../../a.npy', 'tally\\\\a.npy', 'C:a.npy', '.hidden.npy']) {
      editManifest(
        (manifest) => (manifest['arrays'] = { [name]: { type: '<f8', shape: [1], axes: ['half'], holds: '' } }),
      );
      expect(fault(), name).toMatch(/^B\/manifest\.json: arrays\./);
    }
  });

  it('a manifest that leaves out what every bundle holds, or an array that is not what it says', () => {
    editManifest((manifest) => {
      const arrays = manifest['arrays'] as Record<string, { type: string }>;
      arrays['posterior/sd.npy']!.type = '<i8';
    });
    expect(fault()).toMatch(/^B\/posterior\/sd\.npy: <f8 \(5, 7\) where the manifest says <i8 \(5, 7\): /);
    editManifest((manifest) => delete (manifest['arrays'] as Record<string, unknown>)['posterior/sd.npy']);
    expect(fault()).toMatch(/^B\/manifest\.json: arrays: no posterior\/sd\.npy of \[column, outcome\]: /);
  });

  it('a study with other bins than the manifest names', () => {
    const path = join(folder, 'study.json');
    writeFileSync(path, readFileSync(path, 'utf8').replace('0.7', '0.8'));
    expect(fault()).toMatch(/^B\/study\.json: axes: other bins than the manifest names: /);
  });

  it('an array that is missing, truncated, or no file', () => {
    rmSync(arrayPath(folder, 'posterior/sd'));
    expect(fault()).toMatch(/^B\/posterior\/sd\.npy: cannot be opened \(ENOENT\): /);
    truncateSync(arrayPath(folder, 'posterior/mean'), 100);
    expect(fault()).toMatch(/^B\/posterior\/mean\.npy: /);
    rmSync(arrayPath(folder, 'posterior/shape'));
    execFileSync('mkfifo', [arrayPath(folder, 'posterior/shape')]);
    expect(fault()).toMatch(/^B\/posterior\/shape\.npy: not a file: /);
  });

  it('an array that claims an absurd shape', () => {
    for (const shape of [[2 ** 50, 5, 7], [2 ** 31, 5, 7], [9, 35], []]) {
      writeFileSync(arrayPath(folder, 'replicas'), npyHeader('<f8', shape));
      expect(fault()).toMatch(/^B\/replicas\.npy: /);
    }
  });

  it('a study that is not one', () => {
    writeFileSync(join(folder, 'study.json'), '{}');
    expect(fault()).toMatch(/^B\/study\.json: /);
  });
});
