import { InputError } from '../study/input-error';
import type { Batch, Need, Reader, Unit } from './batch';
import { sizeOf } from './byte-source';
import { Hdf5File, type Hdf5Column } from './hdf5-file';
import { findColumns, longest, shortName } from './named-columns';
import { typeOf, unpack } from './packed-field';
import type { Slab } from './slab';
import { batchesOf, rowRanges, type Stretch } from './slab-batches';

/** Bytes of one data set read at a time, where its chunks are no larger. */
const STEP_BYTES = 2_097_152;
const MOST_STEP_ROWS = 65_536;
/** A chunk is decompressed whole: a larger one is refused rather than let it decide about memory. */
const LARGEST_CHUNK = 67_108_864;
/** Fewer rows are not worth a worker of their own. */
const LEAST_ROWS = 500_000;
/**
 * No deflated data grow by more than 1032 times (RFC 1951: at best 258 bytes out of two bits). A data set that claims to
 * is not in the file: HDF5 would give its fill value for ever.
 */
const MOST_GROWTH = 1032;

interface Detail {
  columns: Hdf5Column[];
  from: number;
  to: number;
  step: number;
}

/**
 * HDF5. A column is a data set of one dimension, named by its path (`run1/e_tag`), or a member of a compound one, named
 * by its path, a colon, and the member (`events/table:e_tag`). The last part alone (`e_tag`) will do where only one column
 * of the file ends so: a study can then name columns alike in files of several formats. Columns used together must have
 * the same number of rows.
 */
export const hdf5: Reader = {
  format: 'hdf5',
  places: 'row',

  async columns(path) {
    const all = await withFile(path, path, (file) => file.columns());
    return longest(all).map((column) => ({ name: shortName(column, all), type: kindOf(column) }));
  },

  async plan(path, name, needs, pieces) {
    const all = await withFile(path, name, (file) => file.columns());
    const columns = findColumns(needs, all, name);
    const rows = columns[0]?.rows ?? 0;
    const bytes = sizeOf(path, name);
    for (const column of columns) checkSize(column, bytes, name);
    const step = Math.max(...columns.map(stepOf), 1);
    const share = (row: number): number => Math.round(rows === 0 ? 0 : (row / rows) * bytes);
    return rowRanges(rows, pieces, step, LEAST_ROWS).map(({ from, to }) => {
      const detail: Detail = { columns, from, to, step };
      return {
        path,
        name,
        format: 'hdf5',
        start: share(from),
        end: to === rows ? bytes : share(to),
        rowsBefore: from,
        detail,
      };
    });
  },

  async *read(unit: Unit, needs: readonly Need[], signal?: AbortSignal): AsyncGenerator<Batch> {
    const { columns, from, to, step } = unit.detail as Detail;
    const file = await Hdf5File.open(unit.path, unit.name);
    try {
      yield* batchesOf(unit, needs, to - from, stretches(file, columns, needs, from, to, step), signal);
    } finally {
      file.close();
    }
  },
};

function* stretches(
  file: Hdf5File,
  columns: Hdf5Column[],
  needs: readonly Need[],
  from: number,
  to: number,
  step: number,
): Generator<Stretch> {
  for (let row = from; row < to; row += step) {
    const end = Math.min(to, row + step);
    // Members of one compound come in the same bytes.
    const read = new Map<string, Uint8Array>();
    const slabs = columns.map((column, i): Slab => {
      const { path, field, rowBytes } = column;
      if (field === 'text') return textSlab(file.texts(column, row, end));
      const bytes = read.get(path) ?? file.bytes(column, row, end);
      read.set(path, bytes);
      return unpack(bytes, rowBytes, end - row, field!, needs[i].as);
    });
    yield { slabs, rows: end - row };
  }
}

function textSlab(texts: string[]): Slab {
  return { numbers: null, text: (row) => texts[row] };
}

function kindOf({ field }: Hdf5Column): 'number' | 'text' {
  return field === 'text' || field === null ? 'text' : typeOf(field);
}

function checkSize({ name, rows, rowBytes, chunkRows }: Hdf5Column, bytes: number, file: string): void {
  if (chunkRows * rowBytes > LARGEST_CHUNK) {
    const what = `"${name}" is stored in chunks of ${chunkRows * rowBytes} bytes, at most ${LARGEST_CHUNK} are read`;
    throw new InputError(file, what, 'store it in smaller chunks, as h5repack does');
  }
  if (rows * rowBytes > bytes * MOST_GROWTH) {
    throw new InputError(file, `"${name}" claims ${rows} rows in a file of ${bytes} bytes`, 'make the file again');
  }
}

/** Rows read at a time: whole chunks, so that none is decompressed twice. */
function stepOf({ rowBytes, chunkRows }: Hdf5Column): number {
  const rows = Math.max(1, Math.min(MOST_STEP_ROWS, Math.floor(STEP_BYTES / rowBytes)));
  return Math.max(1, Math.floor(rows / chunkRows)) * chunkRows;
}

async function withFile<T>(path: string, name: string, work: (file: Hdf5File) => T): Promise<T> {
  const file = await Hdf5File.open(path, name);
  try {
    return work(file);
  } finally {
    file.close();
  }
}
