import { closeSync } from 'node:fs';
import type { DuckDBDataChunk } from '@duckdb/node-api';
import type { Batch, Need, Reader, Unit } from './batch';
import { openFile, sizeOf } from './byte-source';
import { OneFile } from './duckdb';
import { positionsOf } from './positions';
import type { Slab } from './slab';
import { batchesOf, rowRanges, type Stretch } from './slab-batches';
import { ask, kindOf, type Asked } from './sql-columns';

/** Fewer rows are not worth a stream of their own. */
const LEAST_ROWS = 1_000_000;

interface Detail {
  columns: number;
  from: number;
  to: number;
  /** The column of each need and its SQL type. */
  positions: number[];
  types: string[];
}

/**
 * Apache Parquet, read by DuckDB. A large file is cut into ranges of rows: one stream hands over its chunks one by one, and
 * two workers with a stream each wait half as long.
 */
export const parquet: Reader = {
  format: 'parquet',
  places: 'row',
  atOnce: 2,

  async columns(path) {
    const columns = await withFile(path, path, (file) => file.columns());
    return columns.slice(0, -1).map(({ name, type }) => ({ name, type: kindOf(type) }));
  },

  async plan(path, name, needs, pieces) {
    const [columns, rows, group] = await withFile(
      path,
      name,
      async (file) => [await file.columns(), await file.count(), await file.rowsOfGroup()] as const,
    );
    const names = columns.slice(0, -1).map((column) => column.name);
    const positions = positionsOf(needs, names, name);
    const types = positions.map((at) => columns[at].type);
    needs.forEach((need, i) => ask(need, types[i], 'c', name));
    const bytes = sizeOf(path, name);
    const share = (row: number): number => (rows === 0 ? bytes : Math.round((bytes * row) / rows));
    // Between groups of rows where there are enough of them: one that is cut is decoded twice.
    const step = group > 0 && group * pieces <= rows ? group : 1;
    return rowRanges(rows, pieces, step, LEAST_ROWS).map(({ from, to }) => {
      const detail: Detail = { columns: columns.length, from, to, positions, types };
      return {
        path,
        name,
        format: 'parquet',
        start: from === 0 ? 0 : share(from),
        end: share(to),
        rowsBefore: from,
        detail,
      };
    });
  },

  read: readUnit,
};

async function* readUnit(unit: Unit, needs: readonly Need[], signal?: AbortSignal): AsyncGenerator<Batch> {
  const { path, name } = unit;
  const { columns, from, to, positions, types } = unit.detail as Detail;
  const asked = needs.map((need, i) => ask(need, types[i], `c${positions[i]}`, name));
  const file = await OneFile.open(path, name);
  try {
    yield* batchesOf(unit, needs, to - from, stretches(file, asked, columns, { from, to }, signal), signal);
  } finally {
    file.close();
  }
}

async function* stretches(
  file: OneFile,
  asked: Asked[],
  columns: number,
  { from, to }: { from: number; to: number },
  signal?: AbortSignal,
): AsyncGenerator<Stretch> {
  const expressions = asked.flatMap(({ numbers, text }) => [numbers, text].filter((each) => each !== null));
  for await (const chunk of file.rows({ expressions, columns, from, to }, signal)) {
    yield { slabs: slabsOf(chunk, asked), rows: chunk.rowCount };
  }
}

function slabsOf(chunk: DuckDBDataChunk, asked: readonly Asked[]): Slab[] {
  let at = 0;
  return asked.map(({ numbers, text }) => {
    const doubles = numbers === null ? null : (chunk.getColumnVector(at++) as unknown as { items: Float64Array }).items;
    if (text === null) return { numbers: doubles, text };
    // A vector of texts is made only where one is asked for.
    const vector = at++;
    return { numbers: doubles, text: (row) => chunk.getColumnVector(vector).getItem(row) as string };
  });
}

async function withFile<T>(path: string, name: string, work: (file: OneFile) => Promise<T>): Promise<T> {
  // Tells an absent file from a damaged one.
  closeSync(openFile(path, name));
  const file = await OneFile.open(path, name);
  try {
    return await work(file);
  } finally {
    file.close();
  }
}
