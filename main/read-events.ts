import { mkdtempSync, readFileSync, existsSync, rmSync, statSync } from 'node:fs';
import { tmpdir } from 'node:os';
import { join } from 'node:path';
import type { Unit } from '../src/events/batch';
import { readerFor, readerOfFormat } from '../src/events/formats';
import { InputError } from '../src/study/input-error';
import { expandFiles, type NamedFile } from '../src/study/paths';
import type { Study } from '../src/study/study';
import { findDuplicates, spilledBuckets } from '../src/tally/identities';
import { addLedger, emptyLedger } from '../src/tally/ledger';
import { tallyPlan, type TallyPlan } from '../src/tally/plan';
import type { Tally } from '../src/tally/tally';
import { TallySums } from '../src/tally/tally-sums';
import { Pool } from './pool';
import type { Progress } from './progress';
import { rejectsPath, type ReadCalls, type UnitDone } from './workers/read-task';

/** Units a worker gets of a file that can be split: more than one, so that a slow worker does not hold up the end. */
const UNITS_PER_WORKER = 8;

export interface ReadOptions {
  study: Study;
  /** The study's folder: its paths are relative to it. */
  folder: string;
  /** Names the study in errors. */
  where: string;
  /** Files to read instead of the study's. */
  files?: NamedFile[];
  readWorker: URL;
  workers: number;
  /** Bytes of selected events to keep in the workers for another tally; none where absent. */
  keep?: number;
  signal?: AbortSignal | undefined;
  onProgress?: (progress: Progress) => void;
}

/** One event file as it was read. */
export interface InputFile {
  name: string;
  bytes: number;
  sha256: string;
  rows: number;
  rejected: number;
  /** Whether places in it are physical lines or row numbers. */
  places: 'line' | 'row';
}

export interface RejectedRow {
  file: string;
  place: number;
  /** Whether the place is a physical line or a row number. */
  places: 'line' | 'row';
  column: string | null;
  value: string | null;
  reason: string;
}

/** What a reading leaves: the tally and everything a bundle or a part says about where it came from. */
export interface Reading {
  plan: TallyPlan;
  sums: TallySums;
  tally: Tally;
  inputs: InputFile[];
  /** Rows that satisfy each cut of the study by itself. */
  cutPassed: number[];
  /** Every rejected row in the order of files and places. */
  rejectedRows(): Iterable<RejectedRow>;
  /** Identity records `[high, low, file, place]` bucket by bucket; `null` where none is read. */
  identities: (() => Iterable<Uint32Array>) | null;
  /** The selected events, where they were to be kept and fitted. */
  store: EventStore | null;
  /** Ends the workers and removes the scratch folder. */
  close(): Promise<void>;
}

/** Selected events kept in the read workers. */
export interface EventStore {
  /** The tally of the same selection under the axes of another study. Roles, cuts and files must be the same. */
  retally(study: Study): Promise<Tally>;
  /** Every kept true or reconstructed value (`NaN`: none), in no particular order. */
  values(of: 'true' | 'reconstructed'): Promise<Float64Array>;
}

/**
 * Reads the event files of a study in worker threads and tallies them. Memory is bounded by batches, not by events.
 * Throws `InputError` for a damaged or unsuitable file, `Cancelled` when the signal says so; leaves nothing behind.
 */
export async function readEvents(options: ReadOptions): Promise<Reading> {
  const { study, folder, where, signal } = options;
  const plan = tallyPlan(study);
  const files = options.files ?? expandFiles(study.events.files, folder, where);
  const units = await planUnits(files, plan, options.workers);
  const scratch = mkdtempSync(join(tmpdir(), 'entasis-'));
  const pool = new Pool<ReadCalls>(options.readWorker, Math.max(1, Math.min(options.workers, units.length + 1)));
  const close = async (): Promise<void> => {
    await pool.stop();
    rmSync(scratch, { recursive: true, force: true });
  };
  const cancel = (): void => void pool.stop();
  signal?.addEventListener('abort', cancel, { once: true });
  try {
    if (signal?.aborted) await pool.stop();
    return await run(options, plan, files, units, scratch, pool, close);
  } catch (error) {
    await close();
    throw error;
  } finally {
    signal?.removeEventListener('abort', cancel);
  }
}

async function planUnits(files: NamedFile[], plan: TallyPlan, workers: number): Promise<Unit[]> {
  const units: Unit[] = [];
  for (const { path, name } of files) {
    const reader = await readerFor(path);
    units.push(...(await reader.plan(path, name, plan.needs, workers * UNITS_PER_WORKER)));
  }
  return units;
}

async function run(
  options: ReadOptions,
  plan: TallyPlan,
  files: NamedFile[],
  units: Unit[],
  scratch: string,
  pool: Pool<ReadCalls>,
  close: () => Promise<void>,
): Promise<Reading> {
  const before = files.map(({ path }) => statSync(path));
  const writers = Array.from({ length: pool.size }, (_, w) => String(w));
  const keep = Math.floor((options.keep ?? 0) / pool.size);
  await Promise.all(writers.map((writer, w) => pool.call(w, 'begin', { plan, scratch, writer, keep })));
  const { done, hashes } = await readUnits(options, files, units, pool);
  files.forEach((file, i) => checkUnchanged(file, before[i]!));

  const ends = await pool.callAll('finish', null);
  const sums = new TallySums(plan);
  for (const end of ends) sums.merge(TallySums.fromPlain(plan, end.sums));
  const places = new Places(units, done);
  const inputs = files.map(({ path, name }, i) => inputOf(path, name, units, done, before[i]!.size, hashes.get(path)!));
  checkAnyTallied(sums, places.rejectedRows(scratch), inputs);
  const spilled = (): Iterable<Uint32Array> => spilledBuckets(scratch, writers);
  const duplicates = plan.at.event < 0 ? null : findDuplicates(spilled(), (unit, place) => places.name(unit, place));
  const fileIndex = new Map(files.map(({ path }, i) => [path, i]));
  const kept = ends.every((end) => end.kept);
  return {
    plan,
    sums,
    tally: sums.finish(duplicates),
    inputs,
    cutPassed: plan.cuts.map((_, c) => ends.reduce((sum, { cutPassed }) => sum + cutPassed[c]!, 0)),
    rejectedRows: () => places.rejectedRows(scratch),
    identities: plan.at.event < 0 ? null : () => places.globalRecords(spilled(), (path) => fileIndex.get(path)!),
    store: kept ? eventStore(pool, sums, duplicates) : null,
    close,
  };
}

type Step = { unit: Unit; ordinal: number } | { hash: string };

async function readUnits(options: ReadOptions, files: NamedFile[], units: Unit[], pool: Pool<ReadCalls>) {
  const done: UnitDone[] = [];
  const hashes = new Map<string, string>();
  const total = files.reduce((sum, { path }) => sum + statSync(path).size, 0);
  const progress: Progress = { stage: 'reading', done: 0, total, unit: 'bytes', rows: 0 };
  // Hashes first: at the end one would keep a single worker busy.
  const steps: Step[] = [
    ...[...new Set(files.map(({ path }) => path))].map((path) => ({ hash: path })),
    ...units.map((unit, ordinal) => ({ unit, ordinal })),
  ];
  const atOnce = Math.max(1, ...units.map(({ format }) => readerOfFormat(format).atOnce ?? 1));
  await pool.share(
    steps,
    async (step, _, w) => {
      if ('hash' in step) {
        hashes.set(step.hash, await pool.call(w, 'hash', { path: step.hash }));
        return;
      }
      done[step.ordinal] = await pool.call(w, 'unit', step, (note) => {
        const { bytes, rows } = note as { bytes: number; rows: number };
        progress.done = Math.min(total, progress.done + bytes);
        progress.rows! += rows;
        options.onProgress?.({ ...progress });
      });
    },
    atOnce,
  );
  return { done, hashes };
}

function checkUnchanged({ path, name }: NamedFile, before: { size: number; mtimeMs: number }): void {
  const now = statSync(path);
  if (now.size !== before.size || now.mtimeMs !== before.mtimeMs) {
    throw new InputError(name, 'changed while it was read', 'build again when nothing writes to it');
  }
}

function inputOf(
  path: string,
  name: string,
  units: Unit[],
  done: UnitDone[],
  bytes: number,
  sha256: string,
): InputFile {
  const own = done.filter((_, i) => units[i]!.path === path);
  const rows = own.reduce((sum, unit) => sum + unit.rows, 0);
  const rejected = own.reduce((sum, unit) => sum + unit.rejected, 0);
  const { places } = readerOfFormat(units.find((unit) => unit.path === path)!.format);
  return { name, bytes, sha256, rows, rejected, places };
}

function checkAnyTallied(sums: TallySums, rejected: Iterable<RejectedRow>, inputs: InputFile[]): void {
  const { read, cut, tallied } = sums.ledger;
  if (tallied > 0) return;
  const where = inputs.length === 1 ? inputs[0]!.name : `${inputs.length} files`;
  if (read === 0) throw new InputError(where, 'a header but no rows', 'check that the export ran to its end');
  for (const { file, place, places, column, value, reason } of rejected) {
    const shown = value === null ? '' : ` "${value}"`;
    const at = places === 'line' ? `${file}:${place}` : `${file}: row ${place}`;
    const what = `all of ${read} rows were rejected or cut (${cut} cut); first rejected: ${reason}${shown}`;
    throw new InputError(at, column ? `${what} in column "${column}"` : what, 'check roles, delimiter and cuts');
  }
  throw new InputError(where, `all of ${read} rows were cut`, 'loosen the cuts of the study');
}

/** Turns places counted from a unit's start into places of its file. */
class Places {
  private readonly offsets: number[] = [];

  constructor(
    private readonly units: Unit[],
    private readonly done: UnitDone[],
  ) {
    const passed = new Map<string, number>();
    units.forEach(({ path }, i) => {
      this.offsets.push(passed.get(path) ?? 0);
      passed.set(path, this.offsets[i]! + done[i]!.placesPassed);
    });
  }

  name(ordinal: number, place: number): string {
    const { name, format } = this.units[ordinal]!;
    const at = this.offsets[ordinal]! + place;
    return readerOfFormat(format).places === 'line' ? `${name}:${at}` : `${name}: row ${at}`;
  }

  *rejectedRows(scratch: string): Generator<RejectedRow> {
    for (const [ordinal, { name, format }] of this.units.entries()) {
      const path = rejectsPath(scratch, ordinal);
      if (this.done[ordinal]!.rejected === 0 || !existsSync(path)) continue;
      const { places } = readerOfFormat(format);
      for (const line of readFileSync(path, 'utf8').split('\n')) {
        if (line === '') continue;
        const [place, column, value, reason] = JSON.parse(line) as [number, string | null, string | null, string];
        yield { file: name, place: this.offsets[ordinal]! + place, places, column, value, reason };
      }
    }
  }

  *globalRecords(buckets: Iterable<Uint32Array>, fileOf: (path: string) => number): Generator<Uint32Array> {
    const files = this.units.map(({ path }) => fileOf(path));
    for (const records of buckets) {
      for (let i = 0; i < records.length; i += 4) {
        const ordinal = records[i + 2]!;
        records[i + 2] = files[ordinal]!;
        records[i + 3]! += this.offsets[ordinal]!;
      }
      yield records;
    }
  }
}

function eventStore(pool: Pool<ReadCalls>, first: TallySums, duplicates: Tally['duplicates']): EventStore {
  return {
    async retally(study) {
      const plan = tallyPlan(study);
      const sums = new TallySums(plan);
      for (const part of await pool.callAll('retally', { plan })) sums.merge(TallySums.fromPlain(plan, part));
      addLedger(sums.ledger, { ...emptyLedger(), ...rowsNotSelected(first) });
      return sums.finish(duplicates);
    },
    async values(of) {
      const parts = await pool.callAll('values', { of });
      const all = new Float64Array(parts.reduce((sum, part) => sum + part.length, 0));
      let at = 0;
      for (const part of parts) {
        all.set(part, at);
        at += part.length;
      }
      return all;
    },
  };
}

function rowsNotSelected({ ledger }: TallySums) {
  const { read, cut, rejected, reasons } = ledger;
  return { read, cut, rejected, reasons };
}
