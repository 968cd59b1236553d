import { readFileSync, readdirSync, statSync, writeFileSync } from 'node:fs';
import { join } from 'node:path';
import { gzipSync } from 'node:zlib';
import { afterAll, beforeAll, describe, expect, it } from 'vitest';
import { betaCdf } from '../../src/numerics/beta';
import { readNpy } from '../../src/handover/npy';
import expected from '../reference/held-out/expected.json';
import { entasis, ownFolder } from './entasis';

const ROWS = 120_000;
const REPLICAS = 2000;
const folder = ownFolder();
const bundle = folder.path('two.bundle');
const studyPath = folder.path('held-out.study.json');

/** The recipe of tests/reference/held-out/make.py, in integers, to the letter. */
function* heldOutEvents(): Generator<[number, number | null]> {
  let state = 20261201;
  const word = (): number => {
    state = (Math.imul(state, 1664525) + 1013904223) >>> 0;
    return state >>> 8;
  };
  for (let i = 0; i < ROWS; i++) {
    const t = Math.floor(((word() % 1000) * (word() % 1000) * 215) / 1000) + (word() % 7);
    const spread = Math.floor((((word() % 2001) + (word() % 2001) - 2000) * (Math.floor(t / 100) + 60)) / 120);
    const r = Math.max(0, Math.floor((t * 97) / 100) + spread);
    yield [t, word() % 100 < 9 ? null : r];
  }
}

const thousandths = (n: number): string => `${Math.floor(n / 1000)}.${String(n % 1000).padStart(3, '0')}`;
const study = (changes: object = {}): string =>
  JSON.stringify({
    schema: 'entasis.study/1',
    events: { files: ['held-out.csv.gz'] },
    roles: { true: 'true', reconstructed: 'reco' },
    axes: { true: { edges: expected.trueEdges }, reconstructed: { edges: expected.recoEdges } },
    ensemble: { replicas: REPLICAS, seed: 7 },
    ...changes,
  });
const array = (name: string): Float64Array => readNpy(join(bundle, name)).values;
const columns = expected.counts.length;
const outcomes = expected.counts[0]!.length;
const cells = columns * outcomes;

/** Every file of a bundle by name, as text of its bytes. */
function bytesOf(path: string): Record<string, string> {
  const names = readdirSync(path, { recursive: true })
    .map(String)
    .filter((name) => statSync(join(path, name)).isFile());
  return Object.fromEntries(names.sort().map((name) => [name, readFileSync(join(path, name), 'base64')]));
}

beforeAll(async () => {
  const lines = ['true,reco'];
  for (const [t, r] of heldOutEvents()) lines.push(`${thousandths(t)},${r === null ? '' : thousandths(r)}`);
  writeFileSync(folder.path('held-out.csv.gz'), gzipSync(`${lines.join('\n')}\n`));
  writeFileSync(studyPath, study());
  const { status, err } = await entasis('build', studyPath, '--out', bundle, '--workers', '2');
  expect([status, err]).toEqual([0, expect.any(String)]);
});
afterAll(folder.remove);

describe('held-out events, 120,000 of them in uneven bins (numpy 1.24.2, SciPy; tests/reference/held-out)', () => {
  it('are counted as numpy counts them, to the last one', () => {
    expect([...array('tally/counts.npy')]).toEqual(expected.counts.flat());
  });

  it.each(['mean', 'sd', 'lower', 'upper'] as const)('have the posterior %s of SciPy within 1e-8', (name) => {
    const ours = array(`posterior/${name}.npy`);
    const worst = expected[name].flat().reduce((most, x, i) => Math.max(most, Math.abs(x - ours[i]!)), 0);
    expect(worst).toBeLessThan(1e-8);
  });

  it('give replicas whose columns sum to 1 within 1e-12', () => {
    const replicas = array('replicas.npy');
    let worst = 0;
    for (let at = 0; at < replicas.length; at += outcomes) {
      let sum = 0;
      for (let k = 0; k < outcomes; k++) sum += replicas[at + k]!;
      worst = Math.max(worst, Math.abs(sum - 1));
    }
    expect(replicas.length).toBe(REPLICAS * cells);
    expect(worst).toBeLessThan(1e-12);
  });

  it('give replicas whose means are within 5 standard errors everywhere', () => {
    const replicas = array('replicas.npy');
    const [means, sds] = [expected.mean.flat(), expected.sd.flat()];
    for (let i = 0; i < cells; i++) {
      let sum = 0;
      for (let r = 0; r < REPLICAS; r++) sum += replicas[r * cells + i]!;
      const errors = Math.abs(sum / REPLICAS - means[i]!) / (sds[i]! / Math.sqrt(REPLICAS));
      expect(errors, `cell ${i}`).toBeLessThan(5);
    }
  });

  it('give cells that follow their Beta: Kolmogorov-Smirnov at 1e-4 over all cells together (Bonferroni)', () => {
    const replicas = array('replicas.npy');
    const shape = array('posterior/shape.npy');
    // Two-sided tail 2 exp(-2 n D^2) (Smirnov 1948, asymptotic) at 1e-4 / cells.
    const limit = Math.sqrt(-Math.log(1e-4 / cells / 2) / (2 * REPLICAS));
    for (let i = 0; i < cells; i++) {
      const j = Math.floor(i / outcomes);
      const total = shape.subarray(j * outcomes, (j + 1) * outcomes).reduce((a, b) => a + b, 0);
      const drawn = Float64Array.from({ length: REPLICAS }, (_, r) => replicas[r * cells + i]!).sort();
      let distance = 0;
      drawn.forEach((p, r) => {
        const cdf = betaCdf(p, shape[i]!, total - shape[i]!);
        distance = Math.max(distance, Math.abs(cdf - r / REPLICAS), Math.abs((r + 1) / REPLICAS - cdf));
      });
      expect(distance, `cell ${i}`).toBeLessThan(limit);
    }
  });
});

describe('the same bytes', () => {
  it('come from one worker and from two', async () => {
    await entasis('build', studyPath, '--out', folder.path('one.bundle'), '--workers', '1');
    expect(bytesOf(folder.path('one.bundle'))).toEqual(bytesOf(bundle));
  });

  it('stand at the beginning of a larger ensemble', async () => {
    writeFileSync(folder.path('more.study.json'), study({ ensemble: { replicas: REPLICAS + 37, seed: 7 } }));
    await entasis('build', folder.path('more.study.json'), '--out', folder.path('more.bundle'));
    const more = readNpy(join(folder.path('more.bundle'), 'replicas.npy')).values;
    expect(
      Buffer.from(more.buffer, more.byteOffset, REPLICAS * cells * 8).equals(Buffer.from(array('replicas.npy').buffer)),
    ).toBe(true);
  });
});

describe('verify', () => {
  it('finds nothing wrong with a bundle as built', async () => {
    const { status, out } = await entasis('verify', bundle, '--json');
    expect([status, JSON.parse(out).holds]).toEqual([0, true]);
  });

  it('finds a change of 1e-9 in one cell of one replica, even where the manifest was made to match', async () => {
    const path = folder.path('one.bundle');
    const file = join(path, 'replicas.npy');
    const bytes = readFileSync(file);
    const at = bytes.length - 8 * (cells * 3 + 5);
    bytes.writeDoubleLE(bytes.readDoubleLE(at) + 1e-9, at);
    writeFileSync(file, bytes);
    const byHash = await entasis('verify', path);
    expect(byHash.status).toBe(1);
    expect(byHash.out).toMatch(/FAILS: every file is as the manifest says \(replicas\.npy was changed/);
    const { createHash } = await import('node:crypto');
    const manifest = JSON.parse(readFileSync(join(path, 'manifest.json'), 'utf8'));
    manifest.files['replicas.npy'].sha256 = createHash('sha256').update(bytes).digest('hex');
    writeFileSync(join(path, 'manifest.json'), JSON.stringify(manifest));
    const byDrawing = await entasis('verify', path);
    expect(byDrawing.status).toBe(1);
    expect(byDrawing.out).toMatch(
      /FAILS: every replica is what seed and tally give, to the bit \(replica 1996, column /,
    );
  });
});
