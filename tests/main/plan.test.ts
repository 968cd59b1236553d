import { mkdirSync, readFileSync, writeFileSync } from 'node:fs';
import { join } from 'node:path';
import { afterAll, beforeAll, describe, expect, it } from 'vitest';
import type { Flag } from '../../src/audit/flag';
import { entasis, ownFolder } from './entasis';

const folder = ownFolder();
afterAll(folder.remove);

const NOW = [40, 3000, 900, 12, 30];
const sum = (values: number[]): number => values.reduce((a, b) => a + b, 0);

/** Events spread evenly by the golden ratio, the same first ones however many: columns `below`, three bins of 1, `above`. */
function rowsOf(events: number[]): string {
  const rows = events.flatMap((n, j) =>
    Array.from({ length: n }, (_, i) => {
      const [u, v] = [(i * 0.6180339887) % 1, (i * 0.7548776662) % 1];
      const t = j - 1 + u;
      return `${t},${v < 0.15 ? '' : t + 0.8 * (v - 0.5)}`;
    }),
  );
  return `t,r\n${rows.join('\n')}\n`;
}

/** Builds a bundle of so many events a column. */
async function campaign(name: string, events: number[]): Promise<string> {
  mkdirSync(folder.path(name));
  writeFileSync(join(folder.path(name), 'e.csv'), rowsOf(events));
  const study = {
    schema: 'entasis.study/1',
    title: name,
    events: { files: ['e.csv'] },
    roles: { true: 't', reconstructed: 'r' },
    axes: { true: { from: 0, to: 3, bins: 3 }, reconstructed: { from: 0, to: 3, bins: 3 } },
    reference: { kind: 'flat', from: -0.5, to: 3.5, events: 2000 },
    ensemble: { replicas: 8, seed: 2 },
  };
  writeFileSync(join(folder.path(name), 's.study.json'), JSON.stringify(study));
  const bundle = folder.path(`${name}.bundle`);
  const built = await entasis('build', join(folder.path(name), 's.study.json'), '--out', bundle);
  expect(built.status, built.err).toBe(0);
  return bundle;
}

async function planned(bundle: string, ...flags: string[]): Promise<any> {
  const run = await entasis('plan', bundle, '--json', ...flags);
  expect(run.status, run.err).toBe(0);
  return JSON.parse(run.out);
}

const flagged = (bundle: string): string[] => {
  const flags = JSON.parse(readFileSync(join(bundle, 'flags.json'), 'utf8')) as Flag[];
  return [...new Set(flags.filter(({ state }) => state === 'flagged').map(({ id }) => id))];
};

let bundle: string;
beforeAll(async () => {
  bundle = await campaign('now', NOW);
});

describe('entasis plan', () => {
  it('asks for what lifts the flags of too few events: with these events added they are gone', async () => {
    expect(flagged(bundle)).toEqual(expect.arrayContaining(['thin', 'prior-led', 'matrix-limited']));
    const { events, needed } = await planned(bundle);
    expect(events).toEqual(NOW);
    const after = await campaign(
      'after',
      NOW.map((n, j) => n + needed[j]),
    );
    const left = flagged(after);
    for (const id of ['empty', 'thin', 'prior-led', 'matrix-limited']) expect(left).not.toContain(id);
  });

  it('meets a target for the share of the matrix in every bin', async () => {
    const { add, total } = await planned(bundle, '--matrix-share', '0.3');
    expect(sum(add)).toBe(total);
    const after = await campaign(
      'share',
      NOW.map((n, j) => n + add[j]),
    );
    const { bins } = JSON.parse(readFileSync(join(after, 'audit.json'), 'utf8'));
    bins.matrixVariance.value.forEach((matrix: number, i: number) => {
      expect(matrix / (matrix + bins.dataVariance.value[i])).toBeLessThanOrEqual(0.3);
    });
  });

  it('meets a target for the efficiency of every column', async () => {
    const { add } = await planned(bundle, '--efficiency-sd', '0.02');
    const after = await campaign(
      'efficiency',
      NOW.map((n, j) => n + add[j]),
    );
    const events = NOW.map((n, j) => n + add[j]);
    const { columns } = JSON.parse(readFileSync(join(after, 'audit.json'), 'utf8'));
    columns.efficiency.value.forEach((e: number, j: number) => {
      // Beta of the events and half an event for each of six outcomes: sd / e = sqrt((1 - e) / (e (A + 1))).
      expect(Math.sqrt((1 - e) / (e * (events[j]! + 3 + 1)))).toBeLessThanOrEqual(0.02);
    });
  });

  it('says what so many more events bring, spread as measured and where they pay most', async () => {
    const { measured, optimal } = await planned(bundle, '--events', '1000');
    const { bins } = JSON.parse(readFileSync(join(bundle, 'audit.json'), 'utf8'));
    measured.before.forEach((ratio: number, i: number) => {
      expect(ratio).toBeCloseTo(bins.matrixVariance.value[i] / bins.dataVariance.value[i], 12);
    });
    expect([sum(measured.add), sum(optimal.add)]).toEqual([1000, 1000]);
    expect(sum(optimal.after)).toBeLessThan(sum(measured.after));
    expect(sum(measured.after)).toBeLessThan(sum(measured.before));
  });

  it('prints the same so that it can be read', async () => {
    const { out } = await entasis('plan', bundle);
    expect(out).toMatch(
      /^now\nreference spectrum: flat spectrum from -0\.5 to 3\.5, 2000 events\nneeded: [\d\u202f]+ more events/,
    );
    expect(out).toMatch(/column +now +to populate +for the reference +needed +and to settle\n/);
    expect(out).toMatch(/^ {2}\[2, 3\) +12 /m);
  });

  it('takes one target at a time, of a kind that can be', async () => {
    const two = await entasis('plan', bundle, '--events', '10', '--matrix-share', '0.5');
    expect([two.status, two.err]).toEqual([2, 'entasis: usage: more than one target: name one of them\n']);
    const one = await entasis('plan', bundle, '--matrix-share', '1');
    expect(one.status).toBe(2);
    expect(one.err).toMatch(/needs a number between 0 and 1/);
  });
});
