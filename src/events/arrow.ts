import { open } from 'node:fs/promises';
import type { DataType, Field, RecordBatch, RecordBatchReader, Schema } from 'apache-arrow';
import { InputError } from '../study/input-error';
import { isWhole, kindOf, slabOf } from './arrow-column';
import { damaged, isArrowFile, LARGEST_BODY, messagesOf } from './arrow-messages';
import type { Batch, Need, Reader, Unit } from './batch';
import { firstBytes, PlainBytes, sizeOf } from './byte-source';
import { unlz4 } from './lz4';
import { positionsOf } from './positions';
import { batchesOf, type Stretch } from './slab-batches';
import { unzstd } from './zstd';

type Arrow = typeof import('apache-arrow');

/** Feather version 1, a format of its own that Arrow's libraries have given up. */
const FEATHER_1 = 'FEA1';

interface Detail {
  positions: number[];
  rows: number;
}

/**
 * Arrow IPC: file, stream, and Feather version 2, which is such a file. Buffers may be compressed by zstd or
 * LZ4.
 */
export const arrow: Reader = {
  format: 'arrow',
  places: 'row',

  async columns(path) {
    const library = await import('apache-arrow');
    const schema = await schemaOf(library, path, path);
    return schema.fields.map(({ name, type }: Field) => ({ name, type: kindOf(library, type) }));
  },

  async plan(path, name, needs) {
    const library = await import('apache-arrow');
    const rows = countRows(library, path, name);
    const { fields } = await schemaOf(library, path, name);
    const names = fields.map((field: Field) => field.name);
    const positions = positionsOf(needs, names, name);
    needs.forEach((need, i) => checkType(library, need, fields[positions[i]].type, name));
    const detail: Detail = { positions, rows };
    return [{ path, name, format: 'arrow', start: 0, end: sizeOf(path, name), detail }];
  },

  async *read(unit: Unit, needs: readonly Need[], signal?: AbortSignal): AsyncGenerator<Batch> {
    const library = await import('apache-arrow');
    const { positions, rows } = unit.detail as Detail;
    yield* batchesOf(unit, needs, rows, stretches(library, unit, needs, positions, rows), signal);
  },
};

async function* stretches(
  library: Arrow,
  unit: Unit,
  needs: readonly Need[],
  positions: number[],
  rows: number,
): AsyncGenerator<Stretch> {
  const { path, name } = unit;
  let passed = 0;
  for await (const batch of recordBatches(library, path, name)) {
    passed += batch.numRows;
    const columns = needs.map((_, i) => batch.getChildAt(positions[i])!);
    if (!columns.every((column) => isWhole(library, column))) {
      throw damaged(name, unit.end, `a buffer is too short behind row ${passed - batch.numRows}`);
    }
    yield {
      slabs: needs.map(({ as }, i) => slabOf(library, columns[i], as)),
      rows: batch.numRows,
    };
  }
  // The table of contents of a file may name other batches than those that follow each other in it.
  if (passed !== rows) throw damaged(name, unit.end, `${passed} rows are listed, ${rows} are there`);
}

async function* recordBatches(library: Arrow, path: string, name: string): AsyncGenerator<RecordBatch> {
  const { CompressionType, compressionRegistry } = library;
  compressionRegistry.set(CompressionType.LZ4_FRAME, { decode: (bytes) => unlz4(bytes, name, LARGEST_BODY) });
  compressionRegistry.set(CompressionType.ZSTD, { decode: (bytes) => unzstd(bytes, name, LARGEST_BODY) });
  const opened = await openReader(library, path, name);
  try {
    for await (const batch of opened.reader) yield batch;
  } catch (cause) {
    throw opened.fault(cause);
  } finally {
    await opened.close();
  }
}

async function schemaOf(library: Arrow, path: string, name: string): Promise<Schema> {
  const opened = await openReader(library, path, name);
  try {
    return opened.reader.schema;
  } finally {
    await opened.close();
  }
}

/** A file is read by its table of contents (some writers put the schema nowhere else), a stream in its order. */
async function openReader(library: Arrow, path: string, name: string) {
  refuseFeather1(path, name);
  const at = { byte: 0 };
  const handle = isArrowFile(path, name) ? await open(path) : null;
  const fault = (cause: unknown): Error =>
    cause instanceof InputError ? cause : damaged(name, at.byte, (cause as Error).message, cause);
  const close = async (): Promise<void> => handle?.close();
  try {
    const source = handle ?? streamBytes(library, path, name, at);
    const reader: RecordBatchReader = await library.RecordBatchReader.from(source as never);
    await reader.open();
    if (!reader.schema) throw new Error('no schema');
    return { reader, fault, close };
  } catch (cause) {
    await close();
    throw fault(cause);
  }
}

/** The messages as a stream, each head and body at once; `at` follows the place. */
function* streamBytes(library: Arrow, path: string, name: string, at: { byte: number }): Generator<Uint8Array> {
  for (const { start, end } of messagesOf(library, path, name)) {
    at.byte = start;
    const bytes = new Uint8Array(end - start);
    const source = new PlainBytes(path, name, start, end);
    try {
      for (let filled = 0; filled < bytes.length;) filled += source.fill(bytes.subarray(filled));
    } finally {
      source.close();
    }
    yield bytes;
  }
}

/** The rows of all record batches, every message of the file looked at. */
function countRows(library: Arrow, path: string, name: string): number {
  refuseFeather1(path, name);
  let rows = 0;
  for (const { message } of messagesOf(library, path, name)) {
    if (message.isRecordBatch()) rows += message.header().length;
  }
  return rows;
}

function refuseFeather1(path: string, name: string): void {
  if (Buffer.from(firstBytes(path, name, FEATHER_1.length)).toString('latin1') !== FEATHER_1) return;
  throw new InputError(name, 'Feather of version 1', 'write it as version 2');
}

function checkType(library: Arrow, { column, as }: Need, type: DataType, name: string): void {
  if (kindOf(library, type) !== 'unknown') return;
  throw new InputError(
    name,
    `column "${column}" holds ${type}`,
    `choose one of single ${as === 'number' ? 'numbers' : 'values'}`,
  );
}
