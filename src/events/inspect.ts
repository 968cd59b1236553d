import { MOST_LABELS, type ColumnFacts, type FileFacts, type Need, type Reader } from './batch';
import { sizeOf } from './byte-source';
import { Census, textFacts } from './census';
import { readerFor } from './formats';

/**
 * What is in an event file: every column with type, missing and non-finite values and range, or labels. Reads the file
 * as a stream. Throws `InputError` for a damaged file or one of no known format, `Cancelled` when the signal says so.
 */
export async function inspectFile(path: string, signal?: AbortSignal): Promise<FileFacts> {
  const reader = await readerFor(path);
  return reader.inspect ? reader.inspect(path, signal) : inspectByTypes(reader, path, signal);
}

/** Numbers are read as they are; of texts first identities, then the labels of those columns that have few. */
async function inspectByTypes(reader: Reader, path: string, signal?: AbortSignal): Promise<FileFacts> {
  const columns = await reader.columns(path);
  const needs = columns.map(({ name, type }): Need => ({ column: name, as: type === 'number' ? type : 'identity' }));
  const { facts, rows, rejected } = await readFacts(reader, path, needs, signal);
  const few = needs.filter(({ as }, i) => as === 'identity' && facts[i].labels !== null);
  const labels = await readLabels(reader, path, few, signal);
  for (const each of facts) if (each.type === 'text') each.labels = labels.get(each.name) ?? null;
  return { path, format: reader.format, bytes: sizeOf(path, path), rows, rejected, columns: facts };
}

async function readFacts(reader: Reader, path: string, needs: Need[], signal?: AbortSignal) {
  const numbers = needs.map(({ column }) => new Census(column, 'number'));
  const texts = needs.map(() => ({ missing: 0, keys: new Set<bigint>() }));
  let rows = 0;
  let rejected = 0;
  for (const unit of await reader.plan(path, path, needs, 1)) {
    for await (const batch of reader.read(unit, needs, signal)) {
      rows += batch.rows;
      rejected += batch.rejects.length;
      batch.columns.forEach((column, i) => {
        if (column.as === 'number') for (const value of column.values) numbers[i].addNumber(value);
        else if (column.as === 'identity') countKeys(texts[i], column.high, column.low);
      });
    }
  }
  const facts = needs.map(({ as, column }, i): ColumnFacts => {
    if (as === 'number') return numbers[i].facts();
    const { missing, keys } = texts[i];
    return { ...textFacts(column, missing), labels: keys.size > MOST_LABELS ? null : [] };
  });
  return { facts, rows, rejected };
}

function countKeys(text: { missing: number; keys: Set<bigint> }, high: Uint32Array, low: Uint32Array): void {
  for (let i = 0; i < high.length; i++) {
    if (high[i] === 0 && low[i] === 0) text.missing += 1;
    else if (text.keys.size <= MOST_LABELS) text.keys.add((BigInt(high[i]) << 32n) | BigInt(low[i]));
  }
}

async function readLabels(reader: Reader, path: string, needs: Need[], signal?: AbortSignal) {
  const found = new Map<string, string[]>();
  if (needs.length === 0) return found;
  const asText = needs.map(({ column }): Need => ({ column, as: 'text' }));
  for (const unit of await reader.plan(path, path, asText, 1)) {
    for await (const { columns } of reader.read(unit, asText, signal)) {
      columns.forEach((column, i) => {
        if (column.as === 'text') found.set(needs[i].column, [...column.labels].sort());
      });
    }
  }
  return found;
}
