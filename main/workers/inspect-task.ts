import type { Batch, ColumnFacts, FileFacts, Need } from '../../src/events/batch';
import { readerFor } from '../../src/events/formats';
import { inspectFile } from '../../src/events/inspect';
import type { ColumnSketch, Histogram } from '../bridge';
import { hashFile } from './hash-file';
import type { Handlers } from './serve';

/** The calls of the inspecting worker. Notes are `{ bytes, rows }` read since the note before. */
export type InspectCalls = {
  inspect: { argument: { path: string }; result: Inspected };
};

export interface Inspected {
  facts: FileFacts;
  sha256: string;
  sketches: ColumnSketch[];
  first: FirstRows;
}

/** The first rows of a file, column by column. */
export interface FirstRows {
  columns: string[];
  places: Float64Array;
  /** Numbers with NaN for missing, or texts with `null`. */
  cells: (Float64Array | (string | null)[])[];
}

/** Rows of a file that the window can look at. */
export const MOST_SHOWN_ROWS = 10_000;
const SKETCH_BINS = 48;
const MOST_SKETCH_LABELS = 24;

/** What the inspecting worker does. Plain functions, callable without a thread. */
export function inspectTask(): Handlers<InspectCalls> {
  return {
    async inspect({ path }, note) {
      const facts = await inspectFile(path);
      const first = await firstRows(facts);
      const sketches = await sketch(facts, note);
      return { result: { facts, sha256: await hashFile(path), sketches, first } };
    },
  };
}

async function* batchesOf(path: string, needs: readonly Need[]): AsyncGenerator<Batch> {
  const reader = await readerFor(path);
  for (const unit of await reader.plan(path, path, needs, 1)) yield* reader.read(unit, needs);
}

function needOf({ name, type }: ColumnFacts): Need {
  return { column: name, as: type };
}

async function firstRows({ path, columns }: FileFacts): Promise<FirstRows> {
  const needs = columns.map(needOf);
  const places: number[] = [];
  const cells: (number | string | null)[][] = columns.map(() => []);
  for await (const batch of batchesOf(path, needs)) {
    const rows = Math.min(batch.rows, MOST_SHOWN_ROWS - places.length);
    for (let i = 0; i < rows; i++) places.push(batch.places[i]!);
    batch.columns.forEach((column, c) => {
      for (let i = 0; i < rows; i++) {
        if (column.as === 'number') cells[c]!.push(column.values[i]!);
        else if (column.as === 'text') cells[c]!.push(column.labels[column.codes[i]!] ?? null);
      }
    });
    if (places.length >= MOST_SHOWN_ROWS) break;
  }
  return {
    columns: columns.map(({ name }) => name),
    places: Float64Array.from(places),
    cells: cells.map((list, c) =>
      columns[c]!.type === 'number' ? Float64Array.from(list as number[]) : (list as (string | null)[]),
    ),
  };
}

/** A small histogram of every column of numbers, and how often each label of the columns with few. */
async function sketch(
  { path, columns }: FileFacts,
  note: (note: { bytes: number; rows: number }) => void,
): Promise<ColumnSketch[]> {
  const sketched = columns.filter((column) => column.least !== null || column.labels !== null);
  const pens = sketched.map((column) => (column.least === null ? new LabelPen() : new HistogramPen(column)));
  if (sketched.length > 0) {
    for await (const batch of batchesOf(path, sketched.map(needOf))) {
      batch.columns.forEach((column, c) => pens[c]!.add(column));
      note({ bytes: batch.bytes, rows: batch.rows + batch.rejects.length });
    }
  }
  return columns.map((column) => {
    const pen = pens[sketched.indexOf(column)];
    return { name: column.name, histogram: pen?.histogram() ?? null, labels: pen?.counted() ?? null };
  });
}

interface Pen {
  add(column: Batch['columns'][number]): void;
  histogram(): Histogram | null;
  counted(): ColumnSketch['labels'];
}

/** Counts finite values between the least and the greatest one. */
class HistogramPen implements Pen {
  private readonly counts: Float64Array;
  private readonly least: number;
  private readonly greatest: number;
  private missing = 0;

  constructor({ least, greatest }: ColumnFacts) {
    [this.least, this.greatest] = [least!, greatest!];
    this.counts = new Float64Array(least === greatest ? 1 : SKETCH_BINS);
  }

  add(column: Batch['columns'][number]): void {
    if (column.as !== 'number') return;
    const bins = this.counts.length;
    const perUnit = this.greatest > this.least ? bins / (this.greatest - this.least) : 0;
    for (const x of column.values) {
      if (x !== x) this.missing++;
      else if (x >= this.least && x <= this.greatest) {
        // The greatest value belongs to the last bin.
        this.counts[Math.min(bins - 1, Math.floor((x - this.least) * perUnit))]!++;
      }
    }
  }

  histogram(): Histogram {
    const bins = this.counts.length;
    const at = (i: number): number => this.least + ((this.greatest - this.least) * i) / bins;
    const edges = Float64Array.from({ length: bins + 1 }, (_, i) => (i === bins ? this.greatest : at(i)));
    return { edges, counts: this.counts, below: 0, above: 0, missing: this.missing };
  }

  counted(): null {
    return null;
  }
}

class LabelPen implements Pen {
  private readonly rows = new Map<string, number>();

  add(column: Batch['columns'][number]): void {
    if (column.as !== 'text') return;
    const counts = new Float64Array(column.labels.length);
    for (const code of column.codes) if (code >= 0) counts[code]!++;
    counts.forEach((count, code) => {
      const label = column.labels[code]!;
      this.rows.set(label, (this.rows.get(label) ?? 0) + count);
    });
  }

  histogram(): null {
    return null;
  }

  counted(): ColumnSketch['labels'] {
    const labels = [...this.rows].map(([label, rows]) => ({ label, rows }));
    return labels.sort((a, b) => b.rows - a.rows || (a.label < b.label ? -1 : 1)).slice(0, MOST_SKETCH_LABELS);
  }
}
