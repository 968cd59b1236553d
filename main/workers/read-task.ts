import { closeSync, openSync, readSync, writeSync } from 'node:fs';
import { join } from 'node:path';
import type { Reject, Unit } from '../../src/events/batch';
import { readerOfFormat } from '../../src/events/formats';
import { BatchTally } from '../../src/tally/batch-tally';
import { IdentitySpill } from '../../src/tally/identities';
import type { TallyPlan } from '../../src/tally/plan';
import type { Events } from '../../src/tally/selection';
import { TallySums, type PlainTallySums } from '../../src/tally/tally-sums';
import { hashFile } from './hash-file';
import type { Handlers } from './serve';

/** The calls of a read worker. */
export type ReadCalls = {
  begin: { argument: BeginReading; result: null };
  unit: { argument: { unit: Unit; ordinal: number }; result: UnitDone };
  finish: { argument: null; result: ReadingDone };
  retally: { argument: { plan: TallyPlan }; result: PlainTallySums };
  values: { argument: { of: 'true' | 'reconstructed' }; result: Float64Array };
  hash: { argument: { path: string }; result: string };
};

export interface BeginReading {
  plan: TallyPlan;
  /** Folder for rejected rows and identities on their way. */
  scratch: string;
  /** Names this worker's files in it. */
  writer: string;
  /** Bytes of selected events this worker may keep; 0 keeps none. */
  keep: number;
}

export interface UnitDone {
  /** Lines (or rows) of the unit: places of the next unit of the file count from here. */
  placesPassed: number;
  rejected: number;
  rows: number;
}

export interface ReadingDone {
  sums: PlainTallySums;
  cutPassed: Float64Array;
  /** Whether every selected event is kept for another tally. */
  kept: boolean;
}

/** Where the rejected rows of a unit wait, places counted from the unit's start. */
export function rejectsPath(scratch: string, ordinal: number): string {
  return join(scratch, `rejects-${ordinal}.jsonl`);
}

/** What a read worker does: units of event files in, sums out. Plain functions, callable without a thread. */
export function readTask(): Handlers<ReadCalls> {
  let task: Reading | null = null;
  const current = (): Reading => {
    if (!task) throw new Error('a read worker was called before it was begun');
    return task;
  };
  return {
    begin(argument) {
      task = new Reading(argument);
      return { result: null };
    },
    async unit({ unit, ordinal }, note) {
      return { result: await current().unit(unit, ordinal, note) };
    },
    finish: () => ({ result: current().finish() }),
    retally: ({ plan }) => ({ result: current().retally(plan) }),
    values({ of }) {
      const result = current().values(of);
      return { result, moved: [result.buffer as ArrayBuffer] };
    },
    hash: async ({ path }) => ({ result: await hashFile(path) }),
  };
}

/** Progress is told no finer: messages cost, and nobody sees the difference. */
const BYTES_BETWEEN_NOTES = 2 << 20;

class Reading {
  private readonly tally: BatchTally;
  private readonly spill: IdentitySpill | null;
  private kept: Events[] | null;
  private keptBytes = 0;

  constructor(private readonly options: BeginReading) {
    const { plan, scratch, writer, keep } = options;
    this.tally = new BatchTally(plan);
    this.spill = plan.at.event < 0 ? null : new IdentitySpill(scratch, writer);
    this.kept = keep > 0 ? [] : null;
  }

  async unit(unit: Unit, ordinal: number, note: (note: unknown) => void): Promise<UnitDone> {
    const { plan, scratch } = this.options;
    const reader = readerOfFormat(unit.format);
    const done: UnitDone = { placesPassed: 0, rejected: 0, rows: 0 };
    let told = { bytes: 0, rows: 0 };
    const rejectsFile = new RejectsFile(rejectsPath(scratch, ordinal));
    const placeOf = (place: number): string => placeInUnit(unit, reader.places, place);
    try {
      for await (const batch of reader.read(unit, plan.needs)) {
        const { events, rejects, identity } = this.tally.add(batch, placeOf);
        if (identity) this.spill!.add(identity, events.rows, ordinal);
        if (rejects.length > 0) rejectsFile.append(rejects);
        this.keep(events);
        done.placesPassed = batch.placesPassed;
        done.rejected += rejects.length;
        done.rows += batch.rows + batch.rejects.length;
        told.bytes += batch.bytes;
        told.rows += batch.rows + batch.rejects.length;
        if (told.bytes >= BYTES_BETWEEN_NOTES) {
          note(told);
          told = { bytes: 0, rows: 0 };
        }
      }
      note(told);
    } finally {
      rejectsFile.close();
    }
    return done;
  }

  finish(): ReadingDone {
    this.spill?.finish();
    const sums = this.tally.finishedSums().toPlain(false);
    return { sums, cutPassed: this.tally.selection.cutPassed, kept: this.kept !== null };
  }

  /** Tallies the kept events again under other axes. The ledger holds only what is tallied. */
  retally(plan: TallyPlan): PlainTallySums {
    const sums = new TallySums(plan);
    for (const events of this.keptEvents()) sums.add(events, this.tally.selection.runLabels);
    return sums.toPlain(false);
  }

  values(of: 'true' | 'reconstructed'): Float64Array {
    const kept = this.keptEvents();
    const all = new Float64Array(kept.reduce((sum, { rows }) => sum + rows, 0));
    let at = 0;
    for (const { truth, reco, rows } of kept) {
      all.set((of === 'true' ? truth : reco).subarray(0, rows), at);
      at += rows;
    }
    return all;
  }

  private keptEvents(): Events[] {
    if (!this.kept) throw new Error('the events of this reading were not kept');
    return this.kept;
  }

  private keep(events: Events): void {
    if (!this.kept || events.rows === 0) return;
    const { rows, truth, reco, weight, run } = events;
    this.keptBytes += rows * (16 + (weight ? 8 : 0) + (run ? 4 : 0));
    if (this.keptBytes > this.options.keep) {
      this.kept = null;
      return;
    }
    this.kept.push({
      rows,
      truth: truth.slice(0, rows),
      reco: reco.slice(0, rows),
      weight: weight?.slice(0, rows) ?? null,
      run: run?.slice(0, rows) ?? null,
      identity: null,
    });
  }
}

/** Names a place of a unit. A unit that starts inside its file knows not its first line: the lines before are counted. */
function placeInUnit(unit: Unit, places: 'line' | 'row', place: number): string {
  if (places === 'row') return `${unit.name}: row ${place + (unit.rowsBefore ?? 0)}`;
  return `${unit.name}:${place + linesBefore(unit.path, unit.start)}`;
}

/** Lines of a plain file that begin before byte `start`: they belong to the units before it. */
function linesBefore(path: string, start: number): number {
  if (start === 0) return 0;
  const file = openSync(path, 'r');
  const block = new Uint8Array(1 << 20);
  // A newline just before `start` begins a line at it, not before it.
  const end = start - 1;
  let lines = 1;
  try {
    for (let at = 0; at < end;) {
      const got = readSync(file, block, 0, Math.min(block.length, end - at), at);
      if (got === 0) break;
      for (let i = 0; i < got; i++) if (block[i] === NEWLINE) lines++;
      at += got;
    }
  } finally {
    closeSync(file);
  }
  return lines;
}

const NEWLINE = 10;

/** Rejected rows of one unit on disk, made only where there are any. */
class RejectsFile {
  private file: number | null = null;
  constructor(private readonly path: string) {}

  append(rejects: readonly Reject[]): void {
    this.file ??= openSync(this.path, 'w');
    const lines = rejects.map(({ place, column, value, reason }) => JSON.stringify([place, column, value, reason]));
    writeSync(this.file, `${lines.join('\n')}\n`);
  }

  close(): void {
    if (this.file !== null) closeSync(this.file);
  }
}
