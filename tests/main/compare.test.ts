import { mkdirSync, writeFileSync } from 'node:fs';
import { join } from 'node:path';
import { afterAll, beforeAll, describe, expect, it } from 'vitest';
import { readNpy } from '../../src/handover/npy';
import { entasis, ownFolder } from './entasis';

const folder = ownFolder();
afterAll(folder.remove);

const AXES = {
  true: { unit: 'MeV', from: 0, to: 2, bins: 2 },
  reconstructed: { unit: 'MeV', from: 0, to: 2, bins: 2 },
};

/** Events of a campaign: `[true value, reconstructed value, how many]`. */
type Counts = [number, number, number][];
const FIRST: Counts = [
  [0.5, 0.5, 30],
  [0.5, 1.5, 70],
  [1.5, 1.5, 400],
  [1.5, 0.5, 100],
];
const SECOND: Counts = [
  [0.5, 0.5, 50],
  [0.5, 1.5, 50],
  [1.5, 1.5, 200],
  [1.5, 0.5, 50],
];

async function campaign(name: string, counts: Counts, more: object = {}): Promise<void> {
  mkdirSync(folder.path(name));
  const rows = counts.flatMap(([t, r, n]) => Array.from({ length: n }, () => `${t},${r}`));
  writeFileSync(join(folder.path(name), 'e.csv'), `t,r\n${rows.join('\n')}\n`);
  const study = {
    schema: 'entasis.study/1',
    title: `Campaign ${name}`,
    events: { files: ['e.csv'] },
    roles: { true: 't', reconstructed: 'r' },
    axes: AXES,
    ensemble: { replicas: 8, seed: 11 },
    ...more,
  };
  writeFileSync(join(folder.path(name), 's.study.json'), JSON.stringify(study));
  const built = await entasis('build', join(folder.path(name), 's.study.json'), '--out', folder.path(`${name}.bundle`));
  expect(built.status, built.err).toBe(0);
}

const at = (name: string): string => folder.path(name);

/** `compare --json` of two of the folders. */
async function compared(first: string, second: string): Promise<any> {
  const run = await entasis('compare', at(first), at(second), '--json');
  expect(run.status, run.err).toBe(0);
  return JSON.parse(run.out);
}

beforeAll(async () => {
  await campaign('first', FIRST);
  await campaign('second', SECOND);
  const part = await entasis('tally', join(at('second'), 's.study.json'), '--out', at('second.part'));
  expect(part.status, part.err).toBe(0);
});

describe('entasis compare', () => {
  it('tests each column for homogeneity, adjusts for all, and gives the distance', async () => {
    const { comparisons, columns } = await compared('first.bundle', 'second.bundle');
    expect(columns).toEqual(['below', '[0, 1)', '[1, 2)', 'above']);
    const [below, changed, same] = comparisons;
    expect(below).toEqual({ column: 'below', reason: 'one of the two has no events here' });
    // Of the posterior means, half a pseudo-count for each of 5 outcomes: 30.5 / 102.5 against 50.5 / 102.5.
    expect(changed.distance).toBeCloseTo(20 / 102.5, 12);
    // scipy.stats.chi2_contingency([[30, 70], [50, 50]], correction=False, lambda_="log-likelihood"), SciPy 1.17.1.
    expect(changed.gSquared).toBeCloseTo(8.402370280734836, 9);
    expect(changed.freedom).toBe(1);
    // Its p-value there is 0.003747: of 4,000 bootstrap tables 15 lie beyond on average, with a standard error of 3.9.
    expect(Math.abs(changed.pValue - 0.003747)).toBeLessThan((5 * 3.9) / 4000);
    expect(changed.adjusted).toBeCloseTo(2 * changed.pValue, 12);
    expect(changed.differs).toBe(true);
    // 400 and 100 against 200 and 50: the same shares.
    // 0.2 and 0.8 in both: what is left are the pseudo-counts of three unseen outcomes, 0.5 / 252.5 against 0.5 / 502.5.
    expect(same.distance).toBeCloseTo(3 * (0.5 / 252.5 - 0.5 / 502.5), 12);
    expect([same.pValue, same.differs]).toEqual([1, false]);
  });

  it('gives the difference of every cell, second minus first, as the bundles have the means', async () => {
    const { comparisons, outcomes } = await compared('first.bundle', 'second.bundle');
    const mean = (name: string): Float64Array => readNpy(join(at(name), 'posterior', 'mean.npy')).values;
    const [a, b] = [mean('first.bundle'), mean('second.bundle')];
    const { value, lower, upper } = comparisons[1].differences;
    expect(value).toHaveLength(outcomes.length);
    value.forEach((difference: number, k: number) => {
      expect(difference).toBeCloseTo(b[outcomes.length + k]! - a[outcomes.length + k]!, 12);
      expect(lower[k]).toBeLessThan(difference);
      expect(upper[k]).toBeGreaterThan(difference);
    });
    // The cell that went from 30 to 50 of 100: its difference is significant.
    expect(lower[outcomes.indexOf('[0, 1)')]).toBeGreaterThan(0);
  });

  it('folds the reference spectrum of the first with both matrices', async () => {
    const { folded, reference } = await compared('first.bundle', 'second.bundle');
    expect(reference).toBe("the calibration's own spectrum, 30000 events");
    const mean = (name: string): Float64Array => readNpy(join(at(name), 'posterior', 'mean.npy')).values;
    // 100 and 500 of 600 events: 5000 and 25000 of the 30000; four outcomes and `lost`.
    const fold = (p: Float64Array, k: number): number => 5000 * p[5 + k]! + 25000 * p[10 + k]!;
    for (const [side, name] of [
      ['first', 'first.bundle'],
      ['second', 'second.bundle'],
    ] as const) {
      folded[side].value.forEach((content: number, i: number) =>
        expect(content).toBeCloseTo(fold(mean(name), i + 1), 6),
      );
    }
    folded.change.value.forEach((change: number, i: number) => {
      expect(change).toBeCloseTo(folded.second.value[i] - folded.first.value[i], 9);
    });
  });

  it('finds nothing between a campaign and itself', async () => {
    const { comparisons, folded } = await compared('first.bundle', 'first.bundle');
    const known = comparisons.filter((column: any) => 'pValue' in column);
    expect(known.map(({ distance, differs }: any) => [distance, differs])).toEqual([
      [0, false],
      [0, false],
    ]);
    expect(folded.change.value).toEqual([0, 0]);
  });

  it('takes a part for the bundle that would be built of it', async () => {
    const [whole, part] = [
      await compared('first.bundle', 'second.bundle'),
      await compared('first.bundle', 'second.part'),
    ];
    expect({ ...part, second: null }).toEqual({ ...whole, second: null });
    expect(part.second.events).toBe(350);
  });

  it('prints what differs so that it can be read', async () => {
    const { status, out } = await entasis('compare', at('first.bundle'), at('second.bundle'));
    expect(status).toBe(0);
    expect(out).toMatch(/^A: Campaign first \(.*first\.bundle\), 600 events\nB: Campaign second \(.*\), 350 events\n/);
    expect(out).toContain('columns that differ: 1 of 2');
    expect(out).toMatch(/▲ {2}\[0, 1\) .* 0\.20 \(0\.\d+ to 0\.\d+\) .* P\(\[[01], [12]\)\) −?0\.(19|20)/);
    expect(out).toContain('below is not compared: one of the two has no events here');
    expect(out).toContain('bins that change beyond the 95 % interval of both matrices: 0 of 2');
    expect(out).toMatch(/^ {4}\[0, 1\) .* 15 %$/m);
  });
});

describe('what cannot be compared', () => {
  it('is campaigns of other bins, and the first of them is named', async () => {
    await campaign('finer', FIRST, { axes: { ...AXES, true: { unit: 'MeV', edges: [0, 0.8, 2] } } });
    const run = await entasis('compare', at('first.bundle'), at('finer.bundle'));
    expect(run.status).toBe(2);
    expect(run.err).toMatch(/^entasis: .*finer\.bundle: columns: "\[0, 0\.8\)" against "\[0, 1\)": compare .*\n$/);
  });

  it('is campaigns in other units', async () => {
    await campaign('keV', FIRST, { axes: { ...AXES, reconstructed: { unit: 'keV', from: 0, to: 2, bins: 2 } } });
    const run = await entasis('compare', at('first.bundle'), at('keV.bundle'));
    expect(run.status).toBe(2);
    expect(run.err).toMatch(/^entasis: .*keV\.bundle: axes\.reconstructed\.unit: "keV" against "MeV": .*\n$/);
  });

  it('is a folder that is neither a bundle nor a part', async () => {
    const run = await entasis('compare', at('first.bundle'), at('first'));
    expect(run.status).toBe(2);
    expect(run.err).toMatch(/^entasis: .*first: neither a bundle nor a part: name the folder of one\n$/);
  });
});
