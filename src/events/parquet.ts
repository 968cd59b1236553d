import { closeSync } from 'node:fs';
import type { DuckDBDataChunk } from '@duckdb/node-api';
import { InputError } from '../study/input-error';
import type { Batch, Need, Reader, Unit } from './batch';
import { BatchBuilder } from './batch-builder';
import { openFile, sizeOf } from './byte-source';
import { OneFile } from './duckdb';
import { positionsOf } from './positions';
import { SlabTaker, type Slab } from './slab';
import { ask, kindOf } from './sql-columns';

const TABLE = 'read_parquet($1, hive_partitioning = false, union_by_name = false, filename = false)';

interface Detail {
  columns: number;
  rows: number;
  /** The column of each need and its SQL type. */
  positions: number[];
  types: string[];
}

/** Apache Parquet, read by DuckDB, which decodes with threads of its own: one unit a file. */
export const parquet: Reader = {
  format: 'parquet',
  places: 'row',

  async columns(path) {
    const columns = await withFile(path, path, (file) => file.columns());
    return columns.map(({ name, type }) => ({ name, type: kindOf(type) }));
  },

  async plan(path, name, needs) {
    const [columns, rows] = await withFile(
      path,
      name,
      async (file) => [await file.columns(), await file.count()] as const,
    );
    const names = columns.map((column) => column.name);
    const positions = positionsOf(needs, names, name);
    const types = positions.map((at) => columns[at].type);
    needs.forEach((need, i) => ask(need, types[i], 'c', name));
    const detail: Detail = { columns: columns.length, rows, positions, types };
    return [{ path, name, format: 'parquet', start: 0, end: sizeOf(path, name), detail }];
  },

  read: readUnit,
};

async function* readUnit(unit: Unit, needs: readonly Need[], signal?: AbortSignal): AsyncGenerator<Batch> {
  const { path, name, end } = unit;
  const { columns, rows, positions, types } = unit.detail as Detail;
  const builder = new BatchBuilder(needs, name);
  const taker = new SlabTaker(needs, builder);
  const asked = needs.map((need, i) => ask(need, types[i], `c${positions[i]}`, name));
  const expressions = asked.flatMap(({ numbers, text }) => [numbers, text].filter((each) => each !== null));
  let passed = 0;
  let told = 0;
  const take = (): Batch => {
    // DuckDB tells no bytes: the share of rows stands for them.
    const bytes = Math.round((rows > 0 ? passed / rows : 1) * end) - told;
    told += bytes;
    return builder.take(bytes, passed);
  };
  const file = await OneFile.open(path, name, TABLE);
  try {
    for await (const { chunk, rows: count } of file.rows(expressions, columns, signal)) {
      const slabs = slabsOf(chunk, asked);
      for (let from = 0; from < count;) {
        const to = Math.min(count, from + taker.room);
        taker.take(slabs, from, to, passed + 1);
        passed += to - from;
        from = to;
        if (builder.full) yield take();
      }
    }
    if (passed !== rows) {
      throw new InputError(name, `${passed} rows where its footer tells ${rows}`, 'copy or make the file again');
    }
    yield take();
  } finally {
    file.close();
  }
}

function slabsOf(chunk: DuckDBDataChunk, asked: readonly { numbers: string | null; text: string | null }[]): Slab[] {
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
  const file = await OneFile.open(path, name, TABLE);
  try {
    return await work(file);
  } finally {
    file.close();
  }
}
