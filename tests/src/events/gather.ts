import { mkdtempSync, writeFileSync } from 'node:fs';
import { tmpdir } from 'node:os';
import { join } from 'node:path';
import type { Column, Need, Reader, Reject, Unit } from '../../../src/events/batch';

/** A row as a test compares it: its place and its values, identities as `high:low`. */
export type Row = [number, ...(number | string | null)[]];

export interface Gathered {
  rows: Row[];
  rejects: Reject[];
  placesPassed: number;
  bytes: number;
  batches: number;
}

const folder = mkdtempSync(join(tmpdir(), 'entasis-events-'));
let made = 0;

/** Writes a file with this content into a folder of the test's own; its path. */
export function fileOf(content: string | Uint8Array, ending = '.csv'): string {
  const path = join(folder, `events-${made++}${ending}`);
  writeFileSync(path, content);
  return path;
}

/** Needs by `column` (a number) or `column:text`, `column:identity`. */
export function needsOf(...columns: string[]): Need[] {
  return columns.map((text) => {
    const [, column, as = 'number'] = /^(.*?)(?::(text|identity))?$/.exec(text)!;
    return { column, as: as as Need['as'] };
  });
}

/** Everything that the units hold, places counted on over them as a build does. */
export async function gather(reader: Reader, units: Unit[], needs: Need[]): Promise<Gathered> {
  const all: Gathered = { rows: [], rejects: [], placesPassed: 0, bytes: 0, batches: 0 };
  for (const unit of units) {
    let passed = 0;
    for await (const batch of reader.read(unit, needs)) {
      for (let i = 0; i < batch.rows; i++) {
        all.rows.push([all.placesPassed + batch.places[i], ...batch.columns.map((column) => valueOf(column, i))]);
      }
      for (const reject of batch.rejects) all.rejects.push({ ...reject, place: all.placesPassed + reject.place });
      all.bytes += batch.bytes;
      all.batches += 1;
      passed = batch.placesPassed;
    }
    all.placesPassed += passed;
  }
  return all;
}

/** Plans and reads a whole file. */
export async function readAll(reader: Reader, path: string, needs: Need[], pieces = 1): Promise<Gathered> {
  return gather(reader, await reader.plan(path, 'events', needs, pieces), needs);
}

function valueOf(column: Column, i: number): number | string | null {
  if (column.as === 'number') return column.values[i];
  if (column.as === 'text') return column.codes[i] < 0 ? null : column.labels[column.codes[i]];
  return column.high[i] === 0 && column.low[i] === 0 ? null : `${column.high[i]}:${column.low[i]}`;
}

/** How the work ends that must fail: the error's name and message. */
export async function refusal(work: Promise<unknown>): Promise<string> {
  return work.then(
    () => 'read without complaint',
    (cause: Error) => `${cause.name}: ${cause.message}`,
  );
}
