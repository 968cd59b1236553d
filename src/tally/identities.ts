import { closeSync, existsSync, openSync, readFileSync, writeSync } from 'node:fs';
import { join } from 'node:path';
import type { Events } from './selection';
import type { Duplicates } from './tally';

/** Identities are parted by a hash of their key, so that one part at a time is held in memory. */
const BUCKET_BITS = 6;
const BUCKETS = 1 << BUCKET_BITS;
/** One record: key high, key low, unit (or file), place. */
const WORDS = 4;
const RECORDS_BUFFERED = 4096;
/** Repeats shown by their places, and places shown of each. */
export const MOST_EXAMPLES = 5;
const MOST_PLACES = 4;

/** Writes the identities of events to part files in a scratch folder: memory stays bounded for any number of events. */
export class IdentitySpill {
  private readonly buffers = Array.from({ length: BUCKETS }, () => new Uint32Array(RECORDS_BUFFERED * WORDS));
  private readonly fill = new Int32Array(BUCKETS);

  /** `writer` names the part files of this spill: each worker has its own. */
  constructor(
    private readonly folder: string,
    private readonly writer: string,
  ) {}

  /** Adds the identities of events of one unit (an ordinal in the order of the files). */
  add(identity: NonNullable<Events['identity']>, rows: number, unit: number): void {
    for (let i = 0; i < rows; i++) this.addRecord(identity.high[i]!, identity.low[i]!, unit, identity.places[i]!);
  }

  addRecord(high: number, low: number, unit: number, place: number): void {
    const bucket = bucketOf(high, low);
    const buffer = this.buffers[bucket]!;
    const at = this.fill[bucket]!;
    buffer[at] = high;
    buffer[at + 1] = low;
    buffer[at + 2] = unit;
    buffer[at + 3] = place;
    this.fill[bucket] = at + WORDS;
    if (at + WORDS === buffer.length) this.flush(bucket);
  }

  /** Writes what is still buffered. */
  finish(): void {
    for (let bucket = 0; bucket < BUCKETS; bucket++) this.flush(bucket);
  }

  private flush(bucket: number): void {
    const filled = this.fill[bucket]!;
    if (filled === 0) return;
    const file = openSync(bucketPath(this.folder, this.writer, bucket), 'a');
    try {
      writeSync(file, new Uint8Array(this.buffers[bucket]!.buffer, 0, filled * 4));
    } finally {
      closeSync(file);
    }
    this.fill[bucket] = 0;
  }
}

/** Keys of integers differ in their low bits alone: a multiplicative hash (Knuth, vol. 3, 6.4) spreads them over the buckets. */
function bucketOf(high: number, low: number): number {
  return Math.imul(Math.imul(high, 0x85ebca6b) ^ low, 0x9e3779b1) >>> (32 - BUCKET_BITS);
}

function bucketPath(folder: string, writer: string, bucket: number): string {
  return join(folder, `identities-${writer}-${bucket}.bin`);
}

/** The records of the spills of several writers, bucket by bucket; those of a bucket in no particular order. */
export function* spilledBuckets(folder: string, writers: readonly string[]): Generator<Uint32Array> {
  for (let bucket = 0; bucket < BUCKETS; bucket++) {
    const paths = writers.map((writer) => bucketPath(folder, writer, bucket)).filter((path) => existsSync(path));
    const parts = paths.map((path) => readFileSync(path));
    const joined = new Uint8Array(parts.reduce((sum, part) => sum + part.length, 0));
    let at = 0;
    for (const part of parts) {
      joined.set(part, at);
      at += part.length;
    }
    yield new Uint32Array(joined.buffer);
  }
}

/**
 * Finds identities that repeat among spilled records. `locate` turns a unit and a place into words. The answer does
 * not depend on which writer saw which event.
 */
export function findDuplicates(
  buckets: Iterable<Uint32Array>,
  locate: (unit: number, place: number) => string,
): Duplicates {
  const found: Duplicates = { identities: 0, rows: 0, examples: [] };
  let first: { unit: number; place: number; places: string[] }[] = [];
  for (const records of buckets) {
    for (const group of repeatedGroups(records)) {
      found.identities++;
      found.rows += group.length - 1;
      const at = group[0]! * WORDS;
      const places = group.slice(0, MOST_PLACES).map((i) => locate(records[i * WORDS + 2]!, records[i * WORDS + 3]!));
      first.push({ unit: records[at + 2]!, place: records[at + 3]!, places });
      first = first.sort((a, b) => a.unit - b.unit || a.place - b.place).slice(0, MOST_EXAMPLES);
    }
  }
  found.examples = first.map(({ places }) => places);
  return found;
}

/** Groups of records with the same key, in the order of their places; single ones left out. */
function repeatedGroups(records: Uint32Array): number[][] {
  const repeated = sortRecords(records, markRepeated(records));
  const groups: number[][] = [];
  for (const i of repeated) {
    const last = groups.at(-1);
    if (last && sameKey(records, last[0]!, i)) last.push(i);
    else groups.push([i]);
  }
  return groups;
}

/** Indices of records whose key stands more than once, by a hash table with open addressing. */
function markRepeated(records: Uint32Array): Uint32Array {
  const count = records.length / WORDS;
  let size = 1024;
  while (size < count * 2) size *= 2;
  const table = new Int32Array(size).fill(-1);
  const repeated = new Uint8Array(count);
  let marked = 0;
  for (let i = 0; i < count; i++) {
    // Keys are hashes or mixed integers already; the multiplier only spreads the low word over the table.
    let slot = (Math.imul(records[i * WORDS]!, 0x9e3779b1) ^ records[i * WORDS + 1]!) & (size - 1);
    while (table[slot]! >= 0 && !sameKey(records, table[slot]!, i)) slot = (slot + 1) & (size - 1);
    const known = table[slot]!;
    if (known < 0) {
      table[slot] = i;
      continue;
    }
    marked += 2 - repeated[known]!;
    repeated[known] = repeated[i] = 1;
  }
  const indices = new Uint32Array(marked);
  let at = 0;
  for (let i = 0; i < count; i++) if (repeated[i] === 1) indices[at++] = i;
  return indices;
}

function sameKey(records: Uint32Array, a: number, b: number): boolean {
  return records[a * WORDS] === records[b * WORDS] && records[a * WORDS + 1] === records[b * WORDS + 1];
}

/** Record indices sorted by key, then unit, then place. */
export function sortRecords(records: Uint32Array, indices: Uint32Array): Uint32Array {
  return indices.sort((a, b) => {
    for (let word = 0; word < WORDS; word++) {
      const difference = records[a * WORDS + word]! - records[b * WORDS + word]!;
      if (difference !== 0) return difference;
    }
    return 0;
  });
}
