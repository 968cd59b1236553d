import { InputError } from '../study/input-error';
import type { Batch, Need, Reader, Unit } from './batch';
import { firstBytes, PlainBytes, sizeOf, type ByteSource } from './byte-source';
import { findColumns } from './named-columns';
import { MOST_HEADER_BYTES, parseNpyHeader, type NpyColumn, type NpyHeader } from './npy-header';
import { typeOf, unpack } from './packed-field';
import { batchesOf, rowRanges, type Stretch } from './slab-batches';

const STEP_BYTES = 2_097_152;
/** Fewer rows are not worth a worker of their own. */
const LEAST_ROWS = 500_000;

interface Detail {
  columns: NpyColumn[];
  header: NpyHeader;
  from: number;
  to: number;
}

/** A structured NumPy array of one dimension (`.npy`): every field of single values is a column. */
export const npy: Reader = {
  format: 'npy',
  places: 'row',

  async columns(path) {
    const { columns } = readHeader(path, path);
    return columns.filter(({ fault }) => fault === '').map(({ name, field }) => ({ name, type: typeOf(field!) }));
  },

  async plan(path, name, needs, pieces) {
    const header = readHeader(path, name);
    const columns = findColumns(needs, header.columns, name);
    const { start, rows, stride } = header;
    const byte = (row: number): number => start + row * stride;
    return rowRanges(rows, pieces, 1, LEAST_ROWS).map(({ from, to }) => {
      const detail: Detail = { columns, header: { ...header, columns: [] }, from, to };
      return { path, name, format: 'npy', start: from === 0 ? 0 : byte(from), end: byte(to), rowsBefore: from, detail };
    });
  },

  async *read(unit: Unit, needs: readonly Need[], signal?: AbortSignal): AsyncGenerator<Batch> {
    const { columns, header, from, to } = unit.detail as Detail;
    const { start, stride } = header;
    const source = new PlainBytes(unit.path, unit.name, start + from * stride, start + to * stride);
    try {
      yield* batchesOf(unit, needs, to - from, stretches(source, columns, needs, stride, to - from, unit.name), signal);
    } finally {
      source.close();
    }
  },
};

async function* stretches(
  source: ByteSource,
  columns: NpyColumn[],
  needs: readonly Need[],
  stride: number,
  rows: number,
  name: string,
): AsyncGenerator<Stretch> {
  const step = Math.max(1, Math.floor(STEP_BYTES / stride));
  for (let row = 0; row < rows; row += step) {
    const count = Math.min(step, rows - row);
    const bytes = await take(source, count * stride, name);
    yield { slabs: columns.map(({ field }, i) => unpack(bytes, stride, count, field!, needs[i].as)), rows: count };
  }
}

/** Exactly `length` bytes. Throws `InputError` where the source ends before. */
export async function take(source: ByteSource, length: number, name: string): Promise<Uint8Array> {
  const bytes = new Uint8Array(length);
  for (let filled = 0; filled < length;) {
    const got = await source.fill(bytes.subarray(filled));
    if (got === 0) throw new InputError(name, `truncated: ${length - filled} bytes are missing at its end`, REMEDY);
    filled += got;
  }
  return bytes;
}

const REMEDY = 'copy or make the file again';

function readHeader(path: string, name: string): NpyHeader {
  const header = parseNpyHeader(firstBytes(path, name, MOST_HEADER_BYTES), '', name);
  const { start, rows, stride, columns } = header;
  if (columns.some((column) => column.name === '')) {
    const what = 'a plain array: its columns have no names';
    throw new InputError(name, what, 'save a structured array, or an .npz of one array a column');
  }
  const size = sizeOf(path, name);
  const end = start + rows * stride;
  const several = columns.some(({ fault }) => fault.includes('dimensions'));
  if (!several && end > size) throw new InputError(name, `truncated: it ends at byte ${size}, not at ${end}`, REMEDY);
  if (!several && end < size)
    throw new InputError(name, `its array ends at byte ${end}, others follow`, 'save one array a file');
  return header;
}
