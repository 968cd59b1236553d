import { existsSync, readFileSync, writeFileSync } from 'node:fs';
import { join } from 'node:path';
import { afterAll, beforeAll, describe, expect, it } from 'vitest';
import { checkSize, MOST_BYTES_UNASKED } from '../../main/ensemble-size';
import { readNpy } from '../../src/handover/npy';
import { MOST_REPLICAS } from '../../src/study/study';
import { entasis, ownFolder, type Run } from './entasis';

const folder = ownFolder();
afterAll(folder.remove);

const STUDY = {
  schema: 'entasis.study/1',
  events: { files: ['e.csv'] },
  roles: { true: 't', reconstructed: 'r' },
  axes: { true: { from: 0, to: 2, bins: 2 }, reconstructed: { from: 0, to: 2, bins: 2 } },
  reference: { kind: 'flat', from: 0, to: 2, events: 1000 },
  ensemble: { replicas: 10, seed: 3 },
};
const BUNDLE = folder.path('digits.bundle');

/** Means, standard uncertainties and ends of the symmetric 95 % interval of `values` (JCGM 101:2008, 7.6 and 7.7). */
function summary(values: number[]): number[] {
  const n = values.length;
  const mean = values.reduce((a, b) => a + b, 0) / n;
  const u = Math.sqrt(values.reduce((sum, x) => sum + (x - mean) ** 2, 0) / (n - 1));
  const sorted = [...values].sort((a, b) => a - b);
  const inside = Math.floor(0.95 * n + 0.5);
  const low = Math.floor((n - inside + 1) / 2);
  return [mean, u, sorted[low - 1]!, sorted[low - 1 + inside]!];
}

const sdOf = (values: number[]): number => summary(values)[1]!;

/** Half a unit in the only digit of an uncertainty: `u = 0.04` gives 0.005 (JCGM 101:2008, 7.9.2, from memory). */
const tolerance = (u: number): number => 0.5 * 10 ** Math.floor(Math.log10(Number(u.toPrecision(1))));

describe('build --digits', () => {
  let run: Run;
  beforeAll(async () => {
    const rows = Array.from({ length: 400 }, (_, i) => `${(i % 2) + 0.5},${((i * 7) % 30) / 12}`);
    writeFileSync(folder.path('e.csv'), `t,r\n${rows.join('\n')}\n`);
    writeFileSync(folder.path('s.study.json'), JSON.stringify(STUDY));
    run = await entasis('build', folder.path('s.study.json'), '--digits', '1', '--out', BUNDLE, '--json');
    expect(run.status, run.err).toBe(0);
  });

  it('writes as many replicas as the rule needs, and says so', () => {
    const { replicas, digits } = JSON.parse(run.out);
    expect(digits).toMatch(/ replicas give 1 significant digit of every folded uncertainty \(JCGM 101:2008, 7\.9\)$/);
    expect(JSON.parse(readFileSync(join(BUNDLE, 'study.json'), 'utf8')).ensemble).toEqual({ replicas, seed: 3 });
    expect(replicas).toBeGreaterThan(STUDY.ensemble.replicas);
  });

  it('meets the rule on the very replicas of the bundle', () => {
    const { values, shape } = readNpy(join(BUNDLE, 'replicas.npy'));
    const [replicas, columns, outcomes] = shape as [number, number, number];
    // 100 / (1 - 0.95) is less than 10^4: blocks of 10^4, rounded up to whole blocks of the ensemble.
    const block = 10_016;
    expect(replicas % block).toBe(0);
    for (let k = 0; k < outcomes; k++) {
      // A flat spectrum of 1000 events: 500 in each of the two true bins, columns 1 and 2.
      const folded = Array.from({ length: replicas }, (_, r) => {
        const at = r * columns * outcomes + k;
        return 500 * (values[at + outcomes]! + values[at + 2 * outcomes]!);
      });
      const blocks = Array.from({ length: replicas / block }, (_, b) =>
        summary(folded.slice(b * block, (b + 1) * block)),
      );
      const limit = tolerance(sdOf(folded));
      for (let q = 0; q < 4; q++) {
        const s = sdOf(blocks.map((found) => found[q]!)) / Math.sqrt(blocks.length);
        expect(2 * s, `outcome ${k}, quantity ${q}`).toBeLessThanOrEqual(limit);
      }
    }
  });

  it('gives a bundle that verifies, and the bytes of a study that states the number itself', async () => {
    expect((await entasis('verify', BUNDLE)).status).toBe(0);
    const { replicas } = JSON.parse(run.out);
    writeFileSync(folder.path('stated.study.json'), JSON.stringify({ ...STUDY, ensemble: { replicas, seed: 3 } }));
    const stated = folder.path('stated.bundle');
    expect((await entasis('build', folder.path('stated.study.json'), '--out', stated)).status).toBe(0);
    for (const name of ['manifest.json', 'replicas.npy']) {
      expect(readFileSync(join(stated, name)).equals(readFileSync(join(BUNDLE, name))), name).toBe(true);
    }
  });

  it('refuses what would fill a disk, in one line, and writes nothing', async () => {
    const out = folder.path('vast.bundle');
    const vast = await entasis('build', folder.path('s.study.json'), '--digits', '6', '--out', out);
    expect(vast.status).toBe(2);
    expect(vast.err).toMatch(
      /entasis: --digits 6: needs about [\d\u202f]+ replicas, .* GB, more than .*: ask for fewer digits, .*\n$/,
    );
    expect(existsSync(out)).toBe(false);
  });

  it('needs a whole number from 1 up', async () => {
    const none = await entasis('build', folder.path('s.study.json'), '--digits', '0');
    expect(none.status).toBe(2);
    expect(none.err).toMatch(/^entasis: usage: .*digits.*whole number from 1 up/);
  });
});

describe('the size of an ensemble that is written unasked', () => {
  it('is bounded in bytes', () => {
    const cells = 1000;
    const most = MOST_BYTES_UNASKED / (8 * cells);
    expect(() => checkSize(2, most, cells)).not.toThrow();
    expect(() => checkSize(2, most + 1, cells)).toThrow(/^--digits 2: needs about .* 8\.00 GB, more than the 8 GB/);
  });

  it('is bounded in replicas', () => {
    expect(() => checkSize(2, MOST_REPLICAS, 4)).not.toThrow();
    expect(() => checkSize(2, MOST_REPLICAS + 1, 4)).toThrow(/more than the 10\u202f000\u202f000 of an ensemble/);
  });
});
