import { execFileSync } from 'node:child_process';
import { existsSync, readFileSync, rmSync } from 'node:fs';
import { createHash } from 'node:crypto';
import { join, resolve } from 'node:path';
import { afterAll, beforeAll, describe, expect, it } from 'vitest';
import { openBundle, readCells, replicaBlocks, type Bundle } from '../../src/handover/open-bundle';
import { makeBundle } from '../src/handover/make-bundle';

/** The examples import the built package by its name, as a user's program does. */
function run(name: string, ...args: string[]): string[] {
  if (!existsSync(resolve('out/main/library.js')))
    throw new Error('the library is not built: run `npm run build` first');
  const path = resolve(import.meta.dirname, '../../resources/examples', name);
  return execFileSync(process.execPath, [path, ...args], { encoding: 'utf8' })
    .trim()
    .split('\n');
}

const numbersIn = (line: string): number[] => (line.match(/-?\d+(\.\d+)?/g) ?? []).map(Number);

describe('the example calibrate.mjs', () => {
  let lines: string[];
  beforeAll(() => (lines = run('calibrate.mjs')));

  it('finds the efficiency that its simulated tile has, 1 - exp(-p / 15), in every bin', () => {
    const inside = lines.filter((line) => line.startsWith('efficiency ['));
    expect(inside).toHaveLength(5);
    for (const line of inside) {
      const [from, to, value, lower, upper] = numbersIn(line) as [number, number, number, number, number];
      // Mean over the bin, momenta being evenly spread in it.
      const truth = 1 - (15 * (Math.exp(-from / 15) - Math.exp(-to / 15))) / (to - from);
      expect(lower).toBeLessThan(truth);
      expect(upper).toBeGreaterThan(truth);
      expect([lower < value, value < upper]).toEqual([true, true]);
    }
  });

  it('folds with 500 replicas to the mean matrix, within 5 standard errors, and keeps every particle', () => {
    const folded = lines.filter((line) => line.startsWith('folded ')).map((line) => numbersIn(line).slice(-3));
    expect(folded).toHaveLength(10);
    for (const [mean, sd, central] of folded as [number, number, number][]) {
      expect(Math.abs(mean - central)).toBeLessThan((5 * sd) / Math.sqrt(500));
    }
    // Ten outcomes printed to 0.05 each.
    expect(Math.abs(folded.reduce((sum, [mean]) => sum + mean!, 0) - 15_000)).toBeLessThan(0.5);
  });

  it('prints what the audit flags, with its evidence', () => {
    expect(lines.some((line) => /^flagged lossy below: efficiency \d/.test(line))).toBe(true);
  });
});

describe('the example hand-on.mjs', () => {
  let bundle: Bundle;
  beforeAll(async () => void (bundle = openBundle(await makeBundle({ replicas: 50 }))));
  afterAll(() => rmSync(bundle.folder, { recursive: true }));

  it('names the cell with the largest pull, and writes the file it reports', () => {
    const out = join(bundle.folder, 'on.npz');
    const [title, pull, file] = run('hand-on.mjs', bundle.folder, out) as [string, string, string];
    expect(title).toBe('Bench photons, "test": 50 replicas of 35 cells');
    const { cell, value } = largestPull();
    expect(pull).toContain(`column ${bundle.columns[Math.floor(cell / 7)]}, outcome ${bundle.outcomes[cell % 7]}`);
    expect(pull).toContain(`largest pull ${value.toFixed(2)} `);
    const sha256 = createHash('sha256').update(readFileSync(out)).digest('hex');
    expect(file).toBe(`${out}: ${readFileSync(out).length} bytes, SHA-256 ${sha256}`);
  });

  function largestPull(): { cell: number; value: number } {
    const { values } = [...replicaBlocks(bundle)][0]!;
    const sd = readCells(bundle, 'posterior/sd');
    const pulls = [...readCells(bundle, 'posterior/mean')].map((mean, cell) => {
      const average = Array.from({ length: 50 }, (_, r) => values[r * 35 + cell]!).reduce((a, b) => a + b, 0) / 50;
      return sd[cell]! > 0 ? ((average - mean) * Math.sqrt(50)) / sd[cell]! : 0;
    });
    const cell = pulls.reduce((best, pull, i) => (Math.abs(pull) > Math.abs(pulls[best]!) ? i : best), 0);
    return { cell, value: pulls[cell]! };
  }
});
