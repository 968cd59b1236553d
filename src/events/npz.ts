import type { Batch, Need, Reader, Unit } from './batch';
import { InputError } from '../study/input-error';
import { sizeOf } from './byte-source';
import { findColumns, longest, shortName } from './named-columns';
import { take } from './npy';
import { dataStart, parseNpyHeader, type NpyColumn, type NpyHeader } from './npy-header';
import { typeOf, unpack } from './packed-field';
import { batchesOf, type Stretch } from './slab-batches';
import { ZipEntries, type EntryBytes } from './zip-entries';

/** Bytes of all needed arrays together that are read at a time. */
const STEP_BYTES = 4_194_304;
const ENDING = '.npy';
/** Enough of an array to tell how long its header is. */
const FIRST_BYTES = 12;

interface ArrayInside {
  entry: string;
  header: NpyHeader;
}

interface Detail {
  arrays: ArrayInside[];
  /** Of each need: its array among `arrays`, and its field in it. */
  sources: { array: number; column: NpyColumn }[];
  rows: number;
}

/**
 * NumPy arrays in a zip archive (`.npz`), stored or deflated. A column is an array of one dimension, named as it was
 * saved, or a field of a structured one, named `array:field`. The last part alone (`field`) will do where it is clear.
 */
export const npz: Reader = {
  format: 'npz',
  places: 'row',

  async columns(path) {
    const all = (await survey(path, path)).flatMap(({ header }) => header.columns);
    return longest(all).map((column) => ({ name: shortName(column, all), type: typeOf(column.field!) }));
  },

  async plan(path, name, needs) {
    const inside = await survey(path, name);
    const all = inside.flatMap(({ header }) => header.columns);
    const columns = findColumns(needs, all, name);
    const arrays = inside.filter(({ header }) => header.columns.some((column) => columns.includes(column)));
    const sources = columns.map((column) => ({
      array: arrays.findIndex(({ header }) => header.columns.includes(column)),
      column,
    }));
    const detail: Detail = { arrays: arrays.map(withoutColumns), sources, rows: columns[0]?.rows ?? 0 };
    return [{ path, name, format: 'npz', start: 0, end: sizeOf(path, name), detail }];
  },

  async *read(unit: Unit, needs: readonly Need[], signal?: AbortSignal): AsyncGenerator<Batch> {
    const { path, name } = unit;
    const detail = unit.detail as Detail;
    const zip = await ZipEntries.open(path, name);
    const streams: EntryBytes[] = [];
    try {
      for (const { entry } of detail.arrays) streams.push(await zip.bytes(zip.entries.get(entry)!));
      yield* batchesOf(unit, needs, detail.rows, stretches(streams, detail, needs, name), signal);
    } finally {
      for (const stream of streams) stream.close();
      zip.close();
    }
  },
};

async function* stretches(
  streams: EntryBytes[],
  { arrays, sources, rows }: Detail,
  needs: readonly Need[],
  name: string,
): AsyncGenerator<Stretch> {
  const strides = arrays.map(({ header }) => header.stride);
  const step = Math.max(1, Math.floor(STEP_BYTES / strides.reduce((sum, stride) => sum + stride, 0)));
  for (const [i, { header }] of arrays.entries()) await take(streams[i], header.start, name);
  for (let row = 0; row < rows; row += step) {
    const count = Math.min(step, rows - row);
    const bytes: Uint8Array[] = [];
    for (const [i, stride] of strides.entries()) bytes.push(await take(streams[i], count * stride, name));
    const slabs = sources.map(({ array, column }, i) =>
      unpack(bytes[array], strides[array], count, column.field!, needs[i].as),
    );
    yield { slabs, rows: count };
  }
  // The end of a stream compares its checksum.
  for (const stream of streams) await stream.fill(new Uint8Array(1));
}

/** The arrays of an archive, their headers read. Throws `InputError` for a damaged one. */
async function survey(path: string, name: string): Promise<ArrayInside[]> {
  const zip = await ZipEntries.open(path, name);
  try {
    const arrays: ArrayInside[] = [];
    for (const [entry, { uncompressedSize }] of zip.entries) {
      if (!entry.endsWith(ENDING)) continue;
      const stream = await zip.bytes(zip.entries.get(entry)!);
      try {
        arrays.push({ entry, header: await headerOf(stream, entry, name, uncompressedSize) });
      } finally {
        stream.close();
      }
    }
    return arrays;
  } finally {
    zip.close();
  }
}

async function headerOf(stream: EntryBytes, entry: string, name: string, size: number): Promise<NpyHeader> {
  const first = await take(stream, FIRST_BYTES, name);
  const rest = await take(stream, Math.max(0, dataStart(first, name) - FIRST_BYTES), name);
  const header = parseNpyHeader(Buffer.concat([first, rest]), entry.slice(0, -ENDING.length), name);
  const usable = header.columns.some(({ fault }) => fault === '');
  const expected = header.start + header.rows * header.stride;
  if (!usable || expected === size) return header;
  throw new InputError(
    name,
    `"${entry}" holds ${size} bytes where its header tells ${expected}`,
    'make the file again',
  );
}

function withoutColumns({ entry, header }: ArrayInside): ArrayInside {
  return { entry, header: { ...header, columns: [] } };
}
