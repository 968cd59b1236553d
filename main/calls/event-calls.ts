import { statSync } from 'node:fs';
import { basename, relative, resolve, sep } from 'node:path';
import { proposeStudy } from '../../src/events/propose-study';
import { parseStudy, type StudyInput } from '../../src/study/study';
import { expandFiles } from '../../src/study/paths';
import type { FileFacts } from '../../src/events/batch';
import type { EventsRead, FileInspection, ProposedStudy, Range, RejectedRows, RowPage } from '../bridge';
import type { Job } from '../session/jobs';
import type { Pool } from '../pool';
import type { Reading } from '../read-events';
import { Refused } from '../session/refusal';
import type { StudyFiles } from '../session/study-events';
import type { FirstRows, InspectCalls, Inspected } from '../workers/inspect-task';
import type { Desk, Handlers } from './handlers';

type EventCall = 'inspectFile' | 'readRows' | 'proposeStudy' | 'readEvents' | 'rejectedRows';

/** Files looked into that are kept: a study of more files asks again. */
const MOST_INSPECTED = 64;

/** Looking into event files, reading them, and the rows that were rejected. */
export function eventCalls(desk: Desk): Handlers<EventCall> {
  const inspected = new InspectedFiles(desk);
  return {
    inspectFile: ({ path, job }) => desk.jobs.run(job, (running) => inspected.inspect(path, running)),
    readRows: ({ path, from, count }) => inspected.rows(path, from, count),
    proposeStudy: ({ files, folder }) => inspected.propose(files, folder),
    readEvents: ({ study, folder, job }) => desk.jobs.run(job, (running) => readAll(desk, study, folder, running)),
    rejectedRows: ({ study, folder, ...page }) => rejectedRows(desk, studyFiles(desk, study, folder), page),
  };
}

/**
 * The study checked, with its files. Throws `InputError` for a faulty study or a path that names nothing, `Refused` for a
 * file that was not chosen in this window.
 */
export function studyFiles(desk: Desk, input: StudyInput, folder: string): StudyFiles {
  const study = parseStudy(input);
  const files = expandFiles(study.events.files, folder, 'study');
  for (const { path } of files) desk.chosen.mayRead(path);
  return { study, folder, files };
}

/** What was found in files, as long as they stay as they were. */
class InspectedFiles {
  private readonly found = new Map<string, { stamp: string; inspected: Inspected }>();

  constructor(private readonly desk: Desk) {}

  async inspect(path: string, job: Job): Promise<FileInspection> {
    const began = this.desk.now();
    const full = this.desk.chosen.mayRead(path);
    const inspected = this.kept(full) ?? (await this.look(full, job));
    const { facts, sha256, sketches, first } = inspected;
    const page = pageOf(first, facts, 0, FIRST_PAGE);
    return { facts, sha256, sketches, first: page, seconds: (this.desk.now() - began) / 1000 };
  }

  rows(path: string, from: number, count: number): RowPage {
    const { first, facts } = this.known(path);
    return pageOf(first, facts, from, count);
  }

  propose(files: readonly string[], folder: string): ProposedStudy {
    const facts = files.map((path) => this.known(path).facts);
    return proposeStudy(
      facts,
      files.map((path) => nameIn(folder, resolve(path))),
    );
  }

  private known(path: string): Inspected {
    const known = this.kept(this.desk.chosen.mayRead(path));
    if (known) return known;
    throw new Refused('not-read', path, 'not looked into yet, or changed since', 'inspect the file first');
  }

  private kept(full: string): Inspected | null {
    const known = this.found.get(full);
    return known?.stamp === stampOf(full) ? known.inspected : null;
  }

  private async look(full: string, { signal, progress }: Job): Promise<Inspected> {
    const stamp = stampOf(full);
    const total = statSync(full).size;
    let [done, rows] = [0, 0];
    const onNote = (note: unknown): void => {
      const step = note as { bytes: number; rows: number };
      done = Math.min(total, done + step.bytes);
      rows += step.rows;
      progress({ stage: 'reading', done, total, unit: 'bytes', rows });
    };
    const look = (pool: Pool<InspectCalls>) => pool.call(0, 'inspect', { path: full }, onNote);
    const inspected = await this.desk.inspectors.lend(signal, look);
    this.found.set(full, { stamp, inspected });
    if (this.found.size > MOST_INSPECTED) this.found.delete(this.found.keys().next().value!);
    return inspected;
  }
}

/** Rows that come with an inspection: more than a screen shows. */
const FIRST_PAGE = 200;

function pageOf({ columns, places, cells }: FirstRows, facts: FileFacts, from: number, count: number): RowPage {
  const end = Math.min(places.length, from + count);
  const rows: RowPage['rows'] = [];
  for (let i = from; i < end; i++) {
    rows.push(cells.map((list) => (list instanceof Float64Array ? numberOrNull(list[i]!) : list[i]!)));
  }
  return { columns, from, places: places.slice(from, end), rows, available: places.length, total: facts.rows };
}

function numberOrNull(x: number): number | null {
  return x === x ? x : null;
}

function stampOf(path: string): string {
  const { size, mtimeMs } = statSync(path);
  return `${size} ${mtimeMs}`;
}

/** A path as a study in `folder` names it: relative with `/` inside the folder, as it stands elsewhere. */
function nameIn(folder: string, path: string): string {
  const near = relative(resolve(folder), path);
  return near === '' ? basename(path) : near.split(sep).join('/');
}

async function readAll(desk: Desk, input: StudyInput, folder: string, job: Job): Promise<EventsRead> {
  const at = studyFiles(desk, input, folder);
  const began = desk.now();
  const { reading } = await desk.events.read(at, { signal: job.signal, onProgress: job.progress });
  const observed = await observedRanges(reading, at);
  return eventsRead(at, reading, observed, (desk.now() - began) / 1000);
}

function eventsRead(at: StudyFiles, reading: Reading, observed: EventsRead['observed'], seconds: number): EventsRead {
  const { tally, inputs, cutPassed, store } = reading;
  const { ledger } = tally;
  return {
    ledger,
    cuts: cutPassed.map((passed) => ({ passed, came: ledger.read })),
    runs: tally.runs?.labels ?? null,
    observed,
    tags: { true: tagsOf(at.study.axes.true), reconstructed: tagsOf(at.study.axes.reconstructed) },
    files: inputs.map(({ name, bytes, rows, sha256 }) => ({ name, bytes, rows, sha256 })),
    kept: store !== null,
    keptBytes: store === null ? 0 : keptBytes(at.study, ledger.tallied + ledger.unmatched),
    rows: ledger.read,
    seconds,
  };
}

/** Bytes of kept events: two values each, a weight and a code of the run where these are read. */
function keptBytes({ roles }: StudyFiles['study'], events: number): number {
  return events * (16 + (roles.weight === undefined ? 0 : 8) + (roles.run === undefined ? 0 : 4));
}

function tagsOf(axis: StudyFiles['study']['axes']['true']): string[] | null {
  return 'tags' in axis ? axis.tags : null;
}

/** Least and greatest values of the events: of the reconstructed ones only where they are in memory. */
async function observedRanges({ tally, store }: Reading, { study }: StudyFiles): Promise<EventsRead['observed']> {
  const numeric = !('tags' in study.axes.reconstructed);
  const values = numeric && store ? await store.values('reconstructed') : new Float64Array(0);
  return { true: tally.trueRange, reconstructed: rangeOf(values) };
}

function rangeOf(values: Float64Array): Range | null {
  let [least, greatest] = [Infinity, -Infinity];
  for (const x of values) {
    if (x < least) least = x;
    if (x > greatest) greatest = x;
  }
  return least <= greatest ? { least, greatest } : null;
}

function rejectedRows(
  desk: Desk,
  at: StudyFiles,
  { reason, from, count }: { reason: string | null; from: number; count: number },
): RejectedRows {
  const reading = desk.events.known(at);
  if (!reading) throw new Refused('not-read', 'events', 'not read yet', 'read the events first');
  const { reasons, rejected } = reading.tally.ledger;
  const rows: RejectedRows['rows'] = [];
  let passed = 0;
  for (const { places: _, ...row } of reading.rejectedRows()) {
    if (reason !== null && row.reason !== reason) continue;
    if (passed++ >= from) rows.push(row);
    if (rows.length === count) break;
  }
  return {
    total: reason === null ? rejected : (reasons[reason] ?? 0),
    from,
    rows,
    reasons: Object.entries(reasons).map(([name, number]) => ({ reason: name, rows: number })),
  };
}
