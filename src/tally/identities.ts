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
    const repeated = sortedRecords(repeatedRecords(records));
    let from = 0;
    while (from < repeated.length) {
      const places: string[] = [];
      let to = from;
      for (; sameKey(repeated, from, to); to += WORDS) {
        if (places.length < MOST_PLACES) places.push(locate(repeated[to + 2]!, repeated[to + 3]!));
      }
      found.identities++;
      found.rows += (to - from) / WORDS - 1;
      first.push({ unit: repeated[from + 2]!, place: repeated[from + 3]!, places });
      first = first.sort((a, b) => a.unit - b.unit || a.place - b.place).slice(0, MOST_EXAMPLES);
      from = to;
    }
  }
  found.examples = first.map(({ places }) => places);
  return found;
}

/** The records whose key stands more than once, found by a hash table with open addressing. */
function repeatedRecords(records: Uint32Array): Uint32Array {
  const count = records.length / WORDS;
  let size = 1024;
  while (size < count * 2) size *= 2;
  const table = new Int32Array(size).fill(-1);
  const repeated = new Uint8Array(count);
  let marked = 0;
  for (let i = 0; i < count; i++) {
    const at = i * WORDS;
    // Keys are hashes or mixed integers already; the multiplier only spreads the low word over the table.
    let slot = (Math.imul(records[at]!, 0x9e3779b1) ^ records[at + 1]!) & (size - 1);
    while (table[slot]! >= 0 && !sameKey(records, table[slot]! * WORDS, at)) slot = (slot + 1) & (size - 1);
    const known = table[slot]!;
    if (known < 0) {
      table[slot] = i;
      continue;
    }
    marked += 2 - repeated[known]!;
    repeated[known] = repeated[i] = 1;
  }
  const found = new Uint32Array(marked * WORDS);
  let to = 0;
  for (let i = 0; i < count; i++) {
    if (repeated[i] === 0) continue;
    for (let word = 0; word < WORDS; word++) found[to++] = records[i * WORDS + word]!;
  }
  return found;
}

/** Whether the records at two places of `records` have the same key; no key stands beyond its end. */
function sameKey(records: Uint32Array, a: number, b: number): boolean {
  return records[a] === records[b] && records[a + 1] === records[b + 1];
}

/** Records sorted by key, then unit, then place: byte by byte from the last (LSD radix sort, Knuth, vol. 3, 5.2.5). */
export function sortedRecords(records: Uint32Array): Uint32Array {
  let [from, to] = [records.slice(), new Uint32Array(records.length)];
  for (let word = WORDS - 1; word >= 0; word--) {
    for (let shift = 0; shift < 32; shift += 8) {
      if (sortByByte(from, to, word, shift)) [from, to] = [to, from];
    }
  }
  return from;
}

/** Sorts by one byte of the records, equal ones left in their order; false, with nothing written, where all are equal. */
function sortByByte(from: Uint32Array, to: Uint32Array, word: number, shift: number): boolean {
  const starts = new Uint32Array(257);
  for (let at = word; at < from.length; at += WORDS) starts[((from[at]! >>> shift) & 255) + 1]! += WORDS;
  if (starts.includes(from.length)) return false;
  for (let byte = 0; byte < 256; byte++) starts[byte + 1]! += starts[byte]!;
  for (let at = 0; at < from.length; at += WORDS) {
    const byte = (from[at + word]! >>> shift) & 255;
    const into = starts[byte]!;
    starts[byte] = into + WORDS;
    to[into] = from[at]!;
    to[into + 1] = from[at + 1]!;
    to[into + 2] = from[at + 2]!;
    to[into + 3] = from[at + 3]!;
  }
  return true;
}
