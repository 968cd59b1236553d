import { execFileSync, spawnSync } from 'node:child_process';
import { rmSync, writeFileSync } from 'node:fs';
import { join, resolve } from 'node:path';
import { afterAll, beforeAll, describe, expect, it } from 'vitest';
import { openBundle, replicaBlocks, type Bundle } from '../../src/handover/open-bundle';
import { writeFits } from '../../src/handover/write-fits';
import { writeHdf5 } from '../../src/handover/write-hdf5';
import { makeBundle } from '../src/handover/make-bundle';
import { hasPython, runPython } from '../src/handover/python';

const loader = (name: string): string => resolve(import.meta.dirname, '../../resources/loaders', name);
const has = (program: string): boolean => spawnSync(program, ['--version']).status === 0;

/** Expected events of the five columns: below, three bins, above. */
const SPECTRUM = [5, 1200, 800, 300.5, 40];

let bundle: Bundle;
let spectrum: string;
beforeAll(async () => {
  bundle = openBundle(await makeBundle({ replicas: 40 }));
  spectrum = join(bundle.folder, 'spectrum.txt');
  writeFileSync(spectrum, SPECTRUM.join('\n'));
});
afterAll(() => rmSync(bundle.folder, { recursive: true }));

/** Mean and sd of each outcome folded with every replica, computed here from the definition. */
function folded(expected: readonly number[]): { mean: number; sd: number }[] {
  const { values, count } = [...replicaBlocks(bundle)][0]!;
  const [columns, outcomes] = [bundle.columns.length, bundle.outcomes.length];
  return bundle.outcomes.map((_, k) => {
    const sums = Array.from({ length: count }, (_, r) =>
      expected.reduce((sum, s, j) => sum + s * values[(r * columns + j) * outcomes + k]!, 0),
    );
    const mean = sums.reduce((a, b) => a + b, 0) / count;
    return { mean, sd: Math.sqrt(sums.reduce((sum, x) => sum + (x - mean) ** 2, 0) / (count - 1)) };
  });
}

/** What a loader printed, against the definition: six digits are printed, so half a unit in the sixth may differ. */
function expectPrinted(
  text: string,
  names: readonly string[],
  expected: readonly number[],
  wanted = folded(expected),
): void {
  const rows = text
    .trim()
    .split('\n')
    .map((line) => line.split('\t'));
  expect(rows.map(([name]) => name)).toEqual(names);
  rows.forEach(([, mean, sd], k) => {
    for (const [printed, value] of [
      [mean, wanted[k]!.mean],
      [sd, wanted[k]!.sd],
    ] as const) {
      expect(Math.abs(Number(printed) - value)).toBeLessThanOrEqual(6e-6 * value);
    }
  });
}

const numbers = (): string[] => bundle.outcomes.map((_, k) => String(k + 1));
const flat = (): number[] => bundle.columns.map(() => 1000);

describe('the loader for', () => {
  it.skipIf(!hasPython('numpy'))('Python and numpy folds a spectrum with every replica of the folder', () => {
    expectPrinted(runPython(loader('fold_npy.py'), bundle.folder, spectrum), bundle.outcomes, SPECTRUM);
    expectPrinted(runPython(loader('fold_npy.py'), bundle.folder), bundle.outcomes, flat());
  });

  it.skipIf(!hasPython('h5py'))('Python and h5py does so with an HDF5 file', async () => {
    const out = join(bundle.folder, 'a.h5');
    await writeHdf5(bundle, { out });
    expectPrinted(runPython(loader('fold_hdf5.py'), out, spectrum), bundle.outcomes, SPECTRUM);
    expectPrinted(runPython(loader('fold_hdf5.py'), out), bundle.outcomes, flat());
  });

  it.skipIf(!hasPython('astropy.io.fits'))('Python and astropy does so with response files, for the bins', async () => {
    await writeFits(bundle, { out: join(bundle.folder, 'a.rsp') });
    const bins = [0, ...SPECTRUM.slice(1, 4), 0];
    const inside = join(bundle.folder, 'bins.txt');
    writeFileSync(inside, SPECTRUM.slice(1, 4).join('\n'));
    const printed = runPython(loader('fold_fits.py'), join(bundle.folder, 'a-replicas.rsp'), inside);
    const names = ['[0, 200) keV', '[200, 400) keV', '[400, 900) keV', '[900, 1700) keV'];
    expectPrinted(printed, names, bins, folded(bins).slice(1, 5));
  });

  it.skipIf(!has('g++'))('C++ does so without any library, and compiles without a warning', () => {
    const program = join(bundle.folder, 'fold');
    const strict = ['-std=c++17', '-O2', '-Wall', '-Wextra', '-Werror', '-pedantic'];
    execFileSync('g++', [...strict, loader('fold.cpp'), '-o', program]);
    expectPrinted(execFileSync(program, [bundle.folder, spectrum], { encoding: 'utf8' }), numbers(), SPECTRUM);
    expectPrinted(execFileSync(program, [bundle.folder], { encoding: 'utf8' }), numbers(), flat());
    const absent = spawnSync(program, [join(bundle.folder, 'absent')], { encoding: 'utf8' });
    expect([absent.status, absent.stderr]).toEqual([1, expect.stringMatching(/not an NPY 1\.0 file\n$/)]);
  });

  it.skipIf(!has('Rscript'))('R does so in base R', () => {
    const run = (...args: string[]): string =>
      execFileSync('Rscript', [loader('fold.R'), ...args], { encoding: 'utf8' });
    expectPrinted(run(bundle.folder, spectrum), numbers(), SPECTRUM);
    expectPrinted(run(bundle.folder), numbers(), flat());
  });

  it.skipIf(!has('julia'))('Julia does so with its standard library', () => {
    const run = (...args: string[]): string =>
      execFileSync('julia', [loader('fold.jl'), ...args], { encoding: 'utf8' });
    expectPrinted(run(bundle.folder, spectrum), numbers(), SPECTRUM);
    expectPrinted(run(bundle.folder), numbers(), flat());
  });
});
