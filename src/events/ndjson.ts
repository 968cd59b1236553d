import { setImmediate as turn } from 'node:timers/promises';
import { InputError, stopIfCancelled } from '../study/input-error';
import type { Batch, FileFacts, Need, Reader, Unit } from './batch';
import { BatchBuilder } from './batch-builder';
import { sizeOf } from './byte-source';
import { Census } from './census';
import { lineUnits, readLines } from './line-units';
import { LineBlocks } from './lines';
import { ObjectParser, parseObject, type JsonObject } from './object-parser';
import { compressionOf, openBytes, type Compression } from './open-bytes';

/** Most different keys a file may have: a file of data has columns, not a key a row. */
const MOST_KEYS = 10_000;
const LINE_FEED = 10;

interface Detail {
  compression: Compression;
}

/**
 * One JSON object a line, plain, gzip or zstd. Every physical line is one row, one reject, or blank and passed over: so
 * the lines are cut here and each is read by `JSON.parse`, where a reader of whole files would lose the line numbers and
 * give bad lines back as rows of missing values.
 */
export const ndjson: Reader = {
  format: 'ndjson',
  places: 'line',

  async columns(path) {
    for await (const { census } of surveys(path, path)) {
      if (census.rows > 0) return census.facts().map(({ name, type }) => ({ name, type }));
    }
    throw noObjects(path);
  },

  async plan(path, name, needs, pieces) {
    await checkKeys(path, name, needs);
    const detail: Detail = { compression: compressionOf(path, name) };
    return lineUnits({ path, name, format: 'ndjson', detail }, detail.compression, pieces);
  },

  read(unit: Unit, needs: readonly Need[], signal?: AbortSignal): AsyncGenerator<Batch> {
    const builder = new BatchBuilder(needs, unit.name);
    const parser = new ObjectParser(needs, builder);
    return readLines(unit, (unit.detail as Detail).compression, parser, builder, signal);
  },

  async inspect(path, signal): Promise<FileFacts> {
    let last = new ObjectCensus(path);
    for await (const { census } of surveys(path, path)) {
      stopIfCancelled(signal);
      last = census;
    }
    const { rows, rejected } = last;
    if (rows === 0) throw noObjects(path);
    return { path, format: 'ndjson', bytes: sizeOf(path, path), rows, rejected, columns: last.facts() };
  },
};

/** Reads on until every needed key was met: a key may first appear late, and only a file without it is at fault. */
async function checkKeys(path: string, name: string, needs: readonly Need[]): Promise<void> {
  let last = new ObjectCensus(name);
  for await (const { census } of surveys(path, name)) {
    last = census;
    if (census.rows > 0 && needs.every(({ column }) => census.has(column))) return;
  }
  if (last.rows === 0) throw noObjects(name);
  const absent = needs.find(({ column }) => !last.has(column));
  if (absent === undefined) return;
  const keys = last.facts().map((facts) => facts.name);
  throw new InputError(name, `no object has a key "${absent.column}"`, `the keys are ${keys.join(', ')}`);
}

/** What was found so far, block by block. */
async function* surveys(path: string, name: string): AsyncGenerator<{ census: ObjectCensus }> {
  const source = openBytes(path, name, compressionOf(path, name));
  const census = new ObjectCensus(name);
  try {
    const blocks = new LineBlocks(source, name);
    for (let block = await blocks.next(); block !== null; block = await blocks.next()) {
      for (let from = 0; from < block.to;) {
        const feed = block.bytes.indexOf(LINE_FEED, from);
        census.addLine(block.bytes, from, feed);
        from = feed + 1;
      }
      yield { census };
      await turn();
    }
  } finally {
    source.close();
  }
}

class ObjectCensus {
  rows = 0;
  rejected = 0;
  private readonly columns = new Map<string, { census: Census; seen: number }>();

  constructor(private readonly file: string) {}

  has(column: string): boolean {
    return this.columns.has(column);
  }

  addLine(bytes: Uint8Array, from: number, to: number): void {
    const parsed = parseObject(bytes, from, to);
    if (typeof parsed === 'object') this.add(parsed.object);
    else if (parsed !== 'blank') this.rejected += 1;
  }

  facts() {
    return [...this.columns.values()].map(({ census, seen }) => {
      const facts = census.facts();
      return { ...facts, missing: facts.missing + this.rows - seen };
    });
  }

  private add(object: JsonObject): void {
    this.rows += 1;
    for (const [key, value] of Object.entries(object)) {
      let column = this.columns.get(key);
      if (column === undefined) {
        if (this.columns.size >= MOST_KEYS) {
          throw new InputError(this.file, `more than ${MOST_KEYS} different keys`, 'give every row the same keys');
        }
        column = { census: new Census(key), seen: 0 };
        this.columns.set(key, column);
      }
      column.seen += 1;
      column.census.addJson(value);
    }
  }
}

function noObjects(name: string): InputError {
  return new InputError(name, 'no line holds a JSON object', 'write one object a line, as in {"t": 1.5, "r": 1.4}');
}
