import { existsSync, mkdirSync, mkdtempSync, readFileSync, rmSync, writeFileSync } from 'node:fs';
import { tmpdir } from 'node:os';
import { join } from 'node:path';
import { pathToFileURL } from 'node:url';
import { afterAll, beforeAll, describe, expect, it } from 'vitest';
import type { Answer, Argument, CallName, Notice, Result } from '../../main/bridge';
import { Session } from '../../main/session';
import { windowFilesBeside } from '../../main/window-files';
import type { Study, StudyInput } from '../../src/study/study';
import { entasis } from './entasis';

const { workerFiles } = windowFilesBeside(pathToFileURL(join(process.cwd(), 'out/main/command.js')));

let folder: string;
let session: Session;
let notices: Notice[];
const at = (...parts: string[]) => join(folder, ...parts);

async function answer<Name extends CallName>(name: Name, argument: Argument<Name>): Promise<Answer<Result<Name>>> {
  return (await session.call(name, argument)) as Answer<Result<Name>>;
}
async function value<Name extends CallName>(name: Name, argument: Argument<Name>): Promise<Result<Name>> {
  const answered = await answer(name, argument);
  if (!answered.ok) throw new Error(`${name}: ${answered.code}: ${answered.where}: ${answered.what}`);
  return answered.value;
}

const EVENTS = 4000;
const TRUE = (i: number) => (i % 100) + 0.5;
/** Every tenth event is lost, the others are reconstructed one above their true value. */
const RECO = (i: number) => (i % 10 === 0 ? '' : String(TRUE(i) + 1));

function eventsText(): string {
  const lines = ['e_true,e_reco,w,run,quality'];
  for (let i = 0; i < EVENTS; i++) lines.push(`${TRUE(i)},${RECO(i)},1,run${i % 3},${Math.floor(i / 100) % 4}`);
  lines.push('broken,3,1,run0,3', ',3,1,run0,3', '5,5,1,run0,3,surplus');
  return `${lines.join('\n')}\n`;
}

const study = (changes: Partial<StudyInput> = {}): StudyInput => ({
  schema: 'entasis.study/1',
  title: 'Invented',
  events: { files: ['events.csv'] },
  roles: { true: 'e_true', reconstructed: 'e_reco', run: 'run' },
  cuts: [{ column: 'quality', is: '>=', value: 1 }],
  axes: {
    true: { label: 'True', unit: 'MeV', from: 0, to: 100, bins: 10 },
    reconstructed: { label: 'Reconstructed', unit: 'MeV', from: 0, to: 100, bins: 10 },
  },
  ensemble: { replicas: 64, seed: 7 },
  ...changes,
});

const here = (changes: Partial<StudyInput> = {}) => ({ study: study(changes), folder });
const withEdges = (edges: number[]) => {
  const { axes } = study();
  return here({ axes: { ...axes, true: { label: 'True', unit: 'MeV', edges } } });
};
const sum = (values: Iterable<number>) => [...values].reduce((a, b) => a + b, 0);

beforeAll(async () => {
  folder = mkdtempSync(join(tmpdir(), 'entasis-session-'));
  writeFileSync(at('events.csv'), eventsText());
  writeFileSync(at('secret.csv'), 'a,b\n1,2\n');
  notices = [];
  session = new Session({ transport: 'loopback', workerFiles, keepsakes: at('keep'), workers: 2 });
  session.listen((notice) => notices.push(notice));
});
afterAll(async () => {
  await session.close();
  rmSync(folder, { recursive: true, force: true });
});

describe('a call', () => {
  it('of no known name is refused', async () => {
    for (const name of ['', 'nothing', '__proto__', 'constructor', 'toString']) {
      expect(await session.call(name, {}), name).toMatchObject({ ok: false, code: 'refused' });
    }
  });

  it('with an argument of the wrong shape is refused before anything is done, with the place of the fault', async () => {
    const cases: [string, unknown, string][] = [
      ['start', undefined, 'start'],
      ['start', { extra: 1 }, 'start'],
      ['readRows', { path: 'a', from: -1, count: 1 }, 'readRows.from'],
      ['readRows', { path: 'a', from: 0, count: 1e9 }, 'readRows.count'],
      ['readRows', { path: 'x'.repeat(5000), from: 0, count: 1 }, 'readRows.path'],
      ['choosePlace', { path: 'a', kind: 'script' }, 'choosePlace.kind'],
      ['tally', { study: [], folder }, 'tally.study'],
      ['tally', { study: null, folder }, 'tally.study'],
      ['saveFile', { path: 'a', data: [1, 2], replace: false }, 'saveFile.data'],
      ['replicas', { ...here(), indices: [] }, 'replicas.indices'],
      ['replicas', { ...here(), indices: [0.5] }, 'replicas.indices.0'],
      ['suggestAxis', { ...here(), axis: 'true', by: { equalPopulation: { bins: 0 } } }, 'suggestAxis.by'],
      ['histogram', { ...here(), of: 'true', bins: 10, from: NaN }, 'histogram.from'],
      ['build', { ...here(), path: 'a', replace: 'yes', job: 'b' }, 'build.replace'],
    ];
    for (const [name, argument, where] of cases) {
      const answered = await session.call(name, argument);
      expect(answered, `${name} ${where}`).toMatchObject({ ok: false, code: 'refused' });
      expect((answered as { where: string }).where.startsWith(where), `${name} ${where}`).toBe(true);
    }
  });

  it('about events that are not read says so', async () => {
    await value('chooseEvents', { patterns: ['events.csv'], folder });
    for (const name of ['posterior', 'audit', 'influence'] as const) {
      expect(await answer(name, here())).toMatchObject({ ok: false, code: 'not-read' });
    }
  });

  it('with a faulty study names the JSON path', async () => {
    const faulty = here({ cuts: [{ column: 'q', is: '>', value: 'text' }] });
    expect(await answer('tally', faulty)).toMatchObject({ ok: false, code: 'input', where: 'study: cuts[0].value' });
  });

  it('cannot reach a file that was not chosen, by a study or by its path', async () => {
    const secret = here({ events: { files: ['secret.csv'] } });
    expect(await answer('readEvents', { ...secret, job: 'x' })).toMatchObject({ ok: false, code: 'refused' });
    expect(await answer('inspectFile', { path: at('secret.csv'), job: 'y' })).toMatchObject({
      ok: false,
      code: 'refused',
    });
    expect(await answer('verify', { bundle: folder, job: 'z' })).toMatchObject({ ok: false, code: 'refused' });
    const table = here({ reference: { kind: 'table', file: 'secret.csv' } });
    await value('readEvents', { ...table, job: 'r' });
    expect(await answer('audit', table)).toMatchObject({ ok: false, code: 'refused' });
  });
});

describe('event files', () => {
  it('are chosen by path, by glob, or by folder, and problems are told beside', async () => {
    const chosen = await value('chooseEvents', { patterns: ['ev*.csv', 'none.csv', '*.parquet'], folder });
    expect(chosen.files).toMatchObject([{ path: at('events.csv'), name: 'events.csv' }]);
    expect(chosen.problems.map(({ code }) => code)).toStrictEqual(['input', 'input']);
    mkdirSync(at('runs'));
    for (const name of ['a.csv', 'b.csv', 'notes.md']) writeFileSync(at('runs', name), 'a,b\n1,2\n');
    const inFolder = await value('chooseEvents', { patterns: [at('runs')], folder });
    expect(inFolder.files.map(({ name }) => name)).toStrictEqual(['runs/a.csv', 'runs/b.csv']);
  });

  it('are looked into: columns, ranges, small histograms, hash and first rows', async () => {
    const found = await value('inspectFile', { path: at('events.csv'), job: 'look' });
    expect(found.facts).toMatchObject({ format: 'csv', rows: EVENTS + 2, rejected: 1 });
    const reco = found.sketches.find(({ name }) => name === 'e_reco')!;
    expect(sum(reco.histogram!.counts) + reco.histogram!.missing).toBe(EVENTS + 1);
    expect(found.sketches.find(({ name }) => name === 'run')!.labels).toHaveLength(3);
    expect(found.sha256).toMatch(/^[0-9a-f]{64}$/);
    expect(found.first.rows[0]).toStrictEqual([0.5, null, 1, 'run0', 0]);
    expect(found.first.places[0]).toBe(2);
    const page = await value('readRows', { path: at('events.csv'), from: EVENTS - 1, count: 10 });
    expect(page).toMatchObject({ available: EVENTS + 1, total: EVENTS + 2 });
    expect(page.rows).toHaveLength(2);
  });

  it('make a starting study, with the reason of each role', async () => {
    const proposed = await value('proposeStudy', { files: [at('events.csv')], folder });
    expect(proposed.study.roles).toMatchObject({ true: 'e_true', reconstructed: 'e_reco', weight: 'w', run: 'run' });
    expect(proposed.study.events.files).toStrictEqual(['events.csv']);
    expect(Object.keys(proposed.reasons).sort()).toStrictEqual(['reconstructed', 'run', 'true', 'weight']);
  });

  it('are read with a ledger that balances, and each rejected row in its place', async () => {
    const read = await value('readEvents', { ...here(), job: 'read' });
    const { ledger } = read;
    expect(ledger).toMatchObject({ read: EVENTS + 3, cut: EVENTS / 4, rejected: 3 });
    expect(ledger.read).toBe(ledger.cut + ledger.rejected + ledger.tallied);
    expect(read).toMatchObject({ kept: true, runs: ['run0', 'run1', 'run2'], rows: EVENTS + 3 });
    expect(read.observed).toStrictEqual({
      true: { least: 0.5, greatest: 99.5 },
      reconstructed: { least: 2.5, greatest: 100.5 },
    });
    // Rows that pass the cut by itself: three of four good ones, and the row without a true value.
    expect(read.cuts).toStrictEqual([{ passed: (EVENTS * 3) / 4 + 1, came: EVENTS + 3 }]);
    const all = await value('rejectedRows', { ...here(), reason: null, from: 0, count: 10 });
    expect(all.rows.map(({ file, place }) => [file, place])).toStrictEqual([
      ['events.csv', EVENTS + 2],
      ['events.csv', EVENTS + 3],
      ['events.csv', EVENTS + 4],
    ]);
    const one = await value('rejectedRows', { ...here(), reason: all.rows[1]!.reason, from: 0, count: 10 });
    expect(one.total).toBe(one.rows.length);
  });
});

describe('axes', () => {
  it('are tallied at once under moved edges, without reading again', async () => {
    const before = await value('tally', here());
    const moved = await value('tally', withEdges([0, 40, 100]));
    expect([before.readAgain, moved.readAgain]).toStrictEqual([false, false]);
    expect(moved.columnNames).toStrictEqual(['below', '[0, 40)', '[40, 100)', 'above']);
    expect(sum(moved.events)).toBe(sum(before.events));
    expect(sum(before.population.subarray(1, 5))).toBe(moved.population[1]);
    // A tenth of the events is lost; with Jeffreys' prior over 13 outcomes the mean is a little off.
    expect(before.efficiency!.value[3]).toBeCloseTo(0.9, 1);
    expect(moved.stability).toBeNull();
    expect(moved.absent.stability).toContain('axes differ');
    expect(before.stability!.value[0]).toBeNaN();
  });

  it('show the histogram of either value, every event in one place', async () => {
    const truth = await value('histogram', { ...here(), of: 'true', bins: 50, from: 10, to: 60 });
    const tallied = (await value('tally', here())).ledger.tallied;
    expect(sum(truth.counts) + truth.below + truth.above + truth.missing).toBe(tallied);
    expect(truth.edges).toHaveLength(51);
    const reco = await value('histogram', { ...here(), of: 'reconstructed', bins: 20 });
    expect(sum(reco.counts) + reco.below + reco.above + reco.missing).toBe(tallied);
    expect(reco.missing).toBe(tallied - sum(reco.counts) - reco.above);
    expect(reco.missing).toBeGreaterThan(0);
  });

  it('are suggested by equal population, by resolution, and by merging thin bins', async () => {
    const equal = await value('suggestAxis', { ...here(), axis: 'true', by: { equalPopulation: { bins: 4 } } });
    expect(equal.edges).toHaveLength(5);
    const counts = (await value('tally', withEdges(equal.edges))).population.slice(1, -1);
    counts.forEach((count) => expect(Math.abs(count / (sum(counts) / 4) - 1)).toBeLessThan(0.1));
    const thin = await value('suggestAxis', {
      ...withEdges([0, 1, 2, 50, 100]),
      axis: 'true',
      by: { mergeThin: { effective: 100 } },
    });
    expect(thin.edges).toStrictEqual([0, 50, 100]);
    expect(thin.note).toContain('4 bins merged to 2');
    const follow = await answer('suggestAxis', { ...here(), axis: 'true', by: { followResolution: { factor: 2 } } });
    // Thirty events in each of 100 true values are enough to see a width, where there is one at all.
    expect(follow.ok).toBe(true);
  });

  it('that a file can no longer serve are read again with another reading of the rows', async () => {
    const other = here({ cuts: [] });
    expect((await value('readEvents', { ...other, job: 'again' })).ledger.cut).toBe(0);
    expect((await value('readEvents', { ...here(), job: 'back' })).ledger.cut).toBe(EVENTS / 4);
  });
});

describe('the matrix', () => {
  it('has a posterior whose columns sum to one, with intervals around the means', async () => {
    const { columns, outcomes, mean, lower, upper, priorMean, methods } = await value('posterior', here());
    expect([columns, outcomes, mean.length]).toStrictEqual([12, 13, 156]);
    for (let j = 0; j < columns; j++) {
      expect(sum(mean.subarray(j * outcomes, (j + 1) * outcomes))).toBeCloseTo(1, 12);
      expect(sum(priorMean.subarray(j * outcomes, (j + 1) * outcomes))).toBeCloseTo(1, 12);
    }
    mean.forEach((m, i) => expect(lower[i]! <= m && m <= upper[i]!).toBe(true));
    expect(new Set(methods)).toStrictEqual(new Set(['exact']));
  });

  it('follows prior and credibility without another tally', async () => {
    const wide = await value('posterior', here({ credibility: 0.99 }));
    const narrow = await value('posterior', here({ credibility: 0.68 }));
    wide.upper.forEach((end, i) => expect(end).toBeGreaterThanOrEqual(narrow.upper[i]!));
    const flat = await value('posterior', here({ prior: { pseudoCount: 1 } }));
    expect(flat.prior[0]).toBe(1);
  });

  it('shows a cell with the density of its Beta, and a column with its band', async () => {
    const cell = await value('cell', { ...here(), column: 3, outcome: 4 });
    const step = cell.x[1]! - cell.x[0]!;
    expect(sum(cell.density) * step).toBeCloseTo(1 - 2e-4, 6);
    expect(cell.equalTailed[1] - cell.equalTailed[0]).toBeGreaterThanOrEqual(cell.shortest[1] - cell.shortest[0]);
    expect(await answer('cell', { ...here(), column: 12, outcome: 0 })).toMatchObject({ ok: false, code: 'input' });
    const column = await value('column', { ...here(), column: 3 });
    const { lower, upper } = await value('posterior', here());
    // A band that holds every outcome at once is wider than the interval of one.
    expect(sum(column.band.upper) - sum(column.band.lower)).toBeGreaterThan(
      sum(upper.subarray(39, 52)) - sum(lower.subarray(39, 52)),
    );
    expect(sum(column.runs!.events)).toBe(sum(column.halves!.lower) + sum(column.halves!.upper));
  });

  it('is audited: every flag of the table has its answer', async () => {
    const audit = await value('audit', here());
    expect(audit.columns.efficiency.value).toHaveLength(12);
    expect(audit.flags.length).toBeGreaterThan(50);
    expect(audit.drift!.distances).toHaveLength(12 * 3);
    const influence = await value('influence', here());
    for (let i = 0; i < influence.binNames.length; i++) {
      expect(sum(influence.shares.subarray(i * 12, (i + 1) * 12))).toBeCloseTo(1, 9);
    }
  });
});

describe('the bundle', () => {
  it('is the same to the byte as the one of the command line, and its replicas are those the window played', async () => {
    const place = at('window.bundle');
    writeFileSync(at('same.study.json'), JSON.stringify(study()));
    await value('choosePlace', { path: place, kind: 'bundle' });
    const built = await value('build', { ...here(), path: place, replace: false, job: 'build' });
    const { status } = await entasis('build', at('same.study.json'), '--out', at('line.bundle'));
    expect(status).toBe(0);
    const names = built.files.map(({ name }) => name);
    expect(names).toContain('replicas.npy');
    for (const name of [...names, 'manifest.json']) {
      expect(readFileSync(join(place, name)).equals(readFileSync(at('line.bundle', name))), name).toBe(true);
    }
    const indices = [0, 40, 63];
    const played = await value('replicas', { ...here(), indices });
    const stored = readFileSync(join(place, 'replicas.npy'));
    const whole = new Float64Array(stored.buffer.slice(stored.byteOffset + (stored.length - 64 * 156 * 8)));
    indices.forEach((index, i) => {
      expect(played.values.subarray(i * 156, (i + 1) * 156)).toStrictEqual(
        whole.subarray(index * 156, (index + 1) * 156),
      );
    });
    const verified = await value('verify', { bundle: place, job: 'verify' });
    expect(verified.checks.filter(({ holds }) => !holds)).toStrictEqual([]);
  });

  it('is not overwritten unasked', async () => {
    const again = await answer('build', { ...here(), path: at('window.bundle'), replace: false, job: 'build' });
    expect(again).toMatchObject({ ok: false, code: 'refused', what: 'something stands there already' });
  });

  it('is not left behind by a build that was cancelled', async () => {
    const place = at('never.bundle');
    await value('choosePlace', { path: place, kind: 'bundle' });
    const many = here({ ensemble: { replicas: 200_000, seed: 1 } });
    const building = answer('build', { ...many, path: place, replace: false, job: 'long' });
    await waitFor(() => notices.some((notice) => notice.kind === 'progress' && notice.job === 'long'));
    expect(await value('cancel', { job: 'long' })).toBe(true);
    expect(await building).toMatchObject({ ok: false, code: 'cancelled' });
    expect(existsSync(place)).toBe(false);
  });
});

describe('the deeper audit', () => {
  it('plans more events for each kind of target', async () => {
    const plan = (target: Argument<'plan'>['target']) => value('plan', { ...here(), target });
    const settle = await plan({ settleFlags: true });
    expect(settle.total).toBe(sum(settle.add));
    const share = await plan({ matrixShare: 0.05 });
    expect(share.reachable).toBe(true);
    expect(share.before).toHaveLength(10);
    expect((await plan({ matrixShare: 0.01 })).total).toBeGreaterThan(share.total);
    const known = await plan({ efficiencySd: 0.001 });
    expect(known.add[5]).toBeGreaterThan(0);
    for (const spread of ['as measured', 'optimal'] as const) {
      const more = await plan({ events: 10_000, spread });
      expect(sum(more.add)).toBe(10_000);
      more.after!.forEach((after, i) => expect(after).toBeLessThanOrEqual(more.before![i]!));
    }
  });

  it('sets the usual priors side by side', async () => {
    const { priors, largest } = await value('priorSensitivity', { ...here(), job: 'priors' });
    expect(priors.map(({ name }) => name)).toStrictEqual(['flat', 'Jeffreys', 'shared total', 'neighbours']);
    // The study's own prior is Jeffreys': it changes nothing.
    expect(Math.max(...priors[1]!.change)).toBe(0);
    expect(largest!.inSd).toBe(Math.max(...priors.flatMap(({ change }) => [...change])));
  });

  it('rehearses the use of the matrix, with progress', async () => {
    const found = await value('rehearse', { ...here(), repetitions: 2, job: 'rehearse' });
    expect(found.columnNames).toHaveLength(found.free.coverage95.value.length);
    expect(found.free.overall95.value).toBeGreaterThan(0.5);
    expect(notices.some((notice) => notice.kind === 'progress' && notice.phase === 'Rehearsing')).toBe(true);
  });

  it('goes on after work in its worker was cancelled', async () => {
    const rehearsing = answer('rehearse', { ...here(), repetitions: 1000, job: 'endless' });
    await waitFor(() => notices.some((notice) => notice.kind === 'progress' && notice.job === 'endless'));
    expect(await value('cancel', { job: 'endless' })).toBe(true);
    expect(await rehearsing).toMatchObject({ ok: false, code: 'cancelled' });
    expect((await value('posterior', here())).columns).toBe(12);
  });

  it('counts the replicas needed for a number of digits', async () => {
    const one = await value('replicasNeeded', { ...here(), digits: 1, job: 'digits' });
    expect(one.replicas).toBeGreaterThanOrEqual(20_000);
    expect(one.note).toContain('1 significant digit');
    const close = { ...here({ credibility: 0.99999 }), digits: 1, job: 'digits' };
    expect(await answer('replicasNeeded', close)).toMatchObject({ ok: false, code: 'input', where: 'credibility' });
  });

  it('finds no difference between a study and its own bundle', async () => {
    const own = await value('compare', { ...here(), bundle: at('window.bundle'), job: 'compare' });
    expect(own.names).toStrictEqual(['Invented', 'Invented']);
    expect(own.differing).toStrictEqual([]);
    own.difference.forEach((difference) => expect(difference).toBe(0));
    expect(await answer('compare', { ...here(), bundle: folder, job: 'c' })).toMatchObject({ code: 'refused' });
    const other = { ...withEdges([0, 40, 100]), bundle: at('window.bundle'), job: 'c' };
    expect(await answer('compare', other)).toMatchObject({ ok: false, code: 'input' });
  });
});

describe('other formats and the report', () => {
  it('are written from a bundle to places of their kind', async () => {
    const bundle = at('window.bundle');
    const path = at('window.npz');
    await value('choosePlace', { path, kind: 'converted' });
    const converted = await value('convert', { bundle, to: 'npz', replicas: [0, 3], path, replace: false, job: 'npz' });
    expect(converted.files[0]).toMatchObject({ path });
    await value('choosePlace', { path: at('report.html'), kind: 'report' });
    const asked = { bundle, path: at('report.html'), pdf: false, replace: false, job: 'report' };
    const { files } = await value('report', asked);
    expect(readFileSync(files[0]!.path, 'utf8')).toContain('Invented');
  });
});

describe('the study document', () => {
  it('is saved whole, opened again, and moved with its paths', async () => {
    mkdirSync(at('elsewhere'));
    const path = at('elsewhere', 'moved.study.json');
    expect(await answer('saveStudy', { ...here(), path, replace: false })).toMatchObject({
      ok: false,
      code: 'refused',
    });
    await value('choosePlace', { path, kind: 'study' });
    const saved = await value('saveStudy', { ...here(), path, replace: false });
    expect(saved.study.events.files).toStrictEqual(['../events.csv']);
    const opened = await value('openStudy', { path });
    expect(opened.study.title).toBe('Invented');
    expect(opened.files).toMatchObject([{ path: at('events.csv') }]);
    expect(opened.problems).toStrictEqual([]);
    expect((await value('recentStudies', {}))[0]).toMatchObject({ path, title: 'Invented', there: true });
    await value('saveStudy', { study: opened.study as Study, folder: opened.folder, path, replace: true });
  });

  it('that names files which are gone opens, and says which', async () => {
    const path = at('gone.study.json');
    writeFileSync(path, JSON.stringify(study({ events: { files: ['events.csv', 'gone.csv'] } })));
    const opened = await value('openStudy', { path });
    expect(opened.files).toHaveLength(1);
    expect(opened.problems).toMatchObject([{ code: 'input', where: 'events.files[1]' }]);
  });

  it('is kept as a draft until it is saved or dropped', async () => {
    await value('keepDraft', { ...here(), path: null });
    expect(await value('dropDraft', {})).toBe(true);
  });

  it('that is none is refused with its place', async () => {
    writeFileSync(at('bad.study.json'), '{"schema": ');
    expect(await answer('openStudy', { path: at('bad.study.json') })).toMatchObject({ ok: false, code: 'input' });
    expect(await answer('openStudy', { path: at('events.csv') })).toMatchObject({ ok: false, what: 'not a study' });
  });
});

describe('figures and tables', () => {
  it('are written where the user chose, once', async () => {
    const path = at('cells.csv');
    const data = new TextEncoder().encode('a,b\n1,2\n');
    expect(await answer('saveFile', { path, data, replace: false })).toMatchObject({ ok: false, code: 'refused' });
    await value('choosePlace', { path, kind: 'text' });
    expect((await value('saveFile', { path, data, replace: false })).files).toMatchObject([{ path, bytes: 8 }]);
    expect(readFileSync(path, 'utf8')).toBe('a,b\n1,2\n');
    expect(await answer('saveFile', { path, data, replace: false })).toMatchObject({ ok: false, code: 'refused' });
  });
});

describe('a window with a small budget of memory', () => {
  it('reads the files again for moved edges, with the same result', async () => {
    const small = new Session({ transport: 'loopback', workerFiles, keepsakes: at('keep'), workers: 1, keep: 100 });
    try {
      const call = async <N extends CallName>(name: N, argument: Argument<N>) =>
        ((await small.call(name, argument)) as { value: Result<N> }).value;
      await call('chooseEvents', { patterns: ['events.csv'], folder });
      expect(await call('readEvents', { ...here(), job: 'r' })).toMatchObject({ kept: false, keptBytes: 0 });
      const moved = await call('tally', { ...withEdges([0, 40, 100]), job: 't' });
      expect(moved.readAgain).toBe(true);
      expect(moved.events).toStrictEqual((await value('tally', withEdges([0, 40, 100]))).events);
      const counted = await call('histogram', { ...withEdges([0, 40, 100]), of: 'true', bins: 5 });
      expect(sum(counted.counts) + counted.below + counted.above).toBe(moved.ledger.tallied);
    } finally {
      await small.close();
    }
  });
});

async function waitFor(holds: () => boolean): Promise<void> {
  await expect.poll(holds, { timeout: 20_000, interval: 5 }).toBe(true);
}
