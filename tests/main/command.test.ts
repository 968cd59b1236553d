import { createHash } from 'node:crypto';
import { execFileSync } from 'node:child_process';
import { existsSync, mkdirSync, readFileSync, readdirSync, writeFileSync } from 'node:fs';
import { join, resolve } from 'node:path';
import { gunzipSync } from 'node:zlib';
import { afterAll, beforeAll, describe, expect, it } from 'vitest';
import { parseManifest } from '../../src/handover/manifest';
import { entasis, ownFolder, startEntasis } from './entasis';

const folder = ownFolder();
afterAll(folder.remove);

const DEMONSTRATION = resolve('resources/demonstration/gallery.study.json');

describe('the demonstration campaign', () => {
  let out: string;
  beforeAll(async () => {
    const run = await entasis('build', DEMONSTRATION, '--out', folder.path('demonstration.bundle'));
    expect(run.status, run.err).toBe(0);
    out = run.out;
  });

  it('is what its seeded generator makes', () => {
    const made = folder.path('made');
    mkdirSync(join(made, 'runs'), { recursive: true });
    writeFileSync(join(made, 'make.mjs'), readFileSync(resolve('resources/demonstration/make.mjs')));
    execFileSync(process.execPath, [join(made, 'make.mjs')]);
    const text = (path: string): string => gunzipSync(readFileSync(path)).toString();
    for (const name of readdirSync(join(made, 'runs'))) {
      expect(text(join(made, 'runs', name)) === text(resolve('resources/demonstration/runs', name)), name).toBe(true);
    }
    expect(readdirSync(join(made, 'runs'))).toEqual(readdirSync(resolve('resources/demonstration/runs')));
  });

  it('raises every first flag somewhere', () => {
    const flags = JSON.parse(readFileSync(folder.path('demonstration.bundle/flags.json'), 'utf8')) as {
      id: string;
      state: string;
    }[];
    const raised = new Set(flags.filter(({ state }) => state === 'flagged').map(({ id }) => id));
    const first = [
      'empty',
      'thin',
      'prior-led',
      'lossy',
      'spill-below',
      'spill-above',
      'single-event',
      'negative-weight',
      'duplicate',
    ];
    expect(first.filter((id) => !raised.has(id))).toEqual([]);
  });

  it('accounts for every row, by reason and in rejects.csv', () => {
    const { ledger } = parseManifest(
      readFileSync(folder.path('demonstration.bundle/manifest.json'), 'utf8'),
      'manifest.json',
    );
    expect(ledger.read).toBe(ledger.cut + ledger.rejected + ledger.tallied);
    const rows = readFileSync(folder.path('demonstration.bundle/rejects.csv'), 'utf8').trimEnd().split('\n').slice(1);
    expect(rows).toHaveLength(ledger.rejected);
    expect(rows.find((row) => row.endsWith('not a number'))).toMatch(/^runs\/run-2\.csv\.gz,\d+,e_wall_MeV,overflow,/);
    // The physical line that a rejected row names is the line of the file.
    const [, line] = /^runs\/run-2\.csv\.gz,(\d+),.*overflow/m.exec(rows.join('\n'))!;
    const lines = gunzipSync(readFileSync(resolve('resources/demonstration/runs/run-2.csv.gz')))
      .toString()
      .split('\n');
    expect(lines[Number(line) - 1]).toBe('2,209001,12.5,overflow,1.002,3');
  });

  it('says in its output where the bundle is, what the audit found, and the cautions', () => {
    expect(out).toContain(folder.path('demonstration.bundle'));
    expect(out).toMatch(/▲ empty\n +\[40, 42\): no events; /);
    expect(out).toMatch(/systematic effects are yours to add/);
    expect(out).toMatch(/not a certified dosimetry or safety instrument/);
    expect(out).toMatch(/accredited practice come first/);
  });

  it('has a manifest that names the hash of every file beside it', () => {
    const bundle = folder.path('demonstration.bundle');
    const { files } = parseManifest(readFileSync(join(bundle, 'manifest.json'), 'utf8'), 'manifest.json');
    for (const [name, { bytes, sha256 }] of Object.entries(files)) {
      const content = readFileSync(join(bundle, name));
      expect([content.length, createHash('sha256').update(content).digest('hex')], name).toEqual([bytes, sha256]);
    }
  });
});

describe('inspect', () => {
  it('proposes a study that build accepts unedited', async () => {
    writeFileSync(
      folder.path('plain.csv'),
      [
        'e_true_keV,e_meas_keV,note',
        ...Array.from({ length: 600 }, (_, i) => `${i / 7},${i % 9 ? (i / 7) * 1.02 : ''},x${i}`),
        '',
      ].join('\n'),
    );
    const { status, out } = await entasis(
      'inspect',
      folder.path('plain.csv'),
      '--study',
      folder.path('plain.study.json'),
      '--json',
    );
    expect(status).toBe(0);
    const { files, study } = JSON.parse(out);
    expect(files[0]).toMatchObject({ rows: 600, rejected: 0 });
    expect(files[0].columns[1]).toMatchObject({ name: 'e_meas_keV', type: 'number', missing: 67 });
    expect(study.roles).toEqual({ true: 'e_true_keV', reconstructed: 'e_meas_keV' });
    expect(study.axes.true.unit).toBe('keV');
    const built = await entasis('build', folder.path('plain.study.json'), '--json');
    expect(built.status, built.err).toBe(0);
    const { ledger, bundle } = JSON.parse(built.out);
    expect(ledger).toMatchObject({ read: 600, tallied: 600 });
    expect(bundle).toBe(folder.path('plain.bundle'));
  });

  it('tells what is in a file that no study can be proposed for, and why', async () => {
    writeFileSync(folder.path('one.csv'), `value\n${Array.from({ length: 30 }, (_, i) => i / 4).join('\n')}\n`);
    const { status, out } = await entasis('inspect', folder.path('one.csv'));
    expect(status).toBe(0);
    expect(out).toMatch(/value +number +0 +0 +0 +0 +7\.25/);
    expect(out).toMatch(/no starting study: no two columns for true and reconstructed values/);
    const json = JSON.parse((await entasis('inspect', folder.path('one.csv'), '--json')).out);
    expect([json.files[0].rows, json.study]).toEqual([30, null]);
    const refused = await entasis('inspect', folder.path('one.csv'), '--study', folder.path('one.study.json'));
    expect([refused.status, existsSync(folder.path('one.study.json'))]).toEqual([2, false]);
  });

  it('does not write over a study that is there', async () => {
    writeFileSync(folder.path('there.study.json'), 'mine');
    const { status, err } = await entasis(
      'inspect',
      folder.path('plain.csv'),
      '--study',
      folder.path('there.study.json'),
    );
    expect([status, readFileSync(folder.path('there.study.json'), 'utf8')]).toEqual([2, 'mine']);
    expect(err).toMatch(/there\.study\.json: is there already: /);
  });
});

describe('Ctrl-C', () => {
  it('ends a build with 130, keeps the bundle that was there, and leaves nothing half-written', async () => {
    const study = folder.path('long.study.json');
    const document = JSON.parse(readFileSync(DEMONSTRATION, 'utf8'));
    document.events.files = [resolve('resources/demonstration/runs/run-1.csv.gz')];
    document.ensemble.replicas = 100;
    writeFileSync(study, JSON.stringify(document));
    expect((await entasis('build', study)).status).toBe(0);
    const before = readFileSync(folder.path('long.bundle/manifest.json'), 'utf8');
    document.ensemble.replicas = 2_000_000;
    writeFileSync(study, JSON.stringify(document));
    const child = startEntasis('build', study);
    const partial = (): string | undefined =>
      readdirSync(folder.path('.')).find((name) => name.startsWith('.long.bundle'));
    await until(() => partial() !== undefined && existsSync(folder.path(`${partial()}/replicas.npy`)));
    child.kill('SIGINT');
    const status = await new Promise((done) => child.on('exit', done));
    expect(status).toBe(130);
    expect(partial()).toBeUndefined();
    expect(readFileSync(folder.path('long.bundle/manifest.json'), 'utf8')).toBe(before);
  });
});

async function until(condition: () => boolean): Promise<void> {
  const deadline = Date.now() + 30_000;
  while (!condition()) {
    if (Date.now() > deadline) throw new Error('it did not come about within 30 s');
    await new Promise((wait) => setTimeout(wait, 20));
  }
}
