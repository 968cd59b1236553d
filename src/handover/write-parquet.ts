import type { DuckDBConnection, DuckDBTableFunction, DuckDBType } from '@duckdb/node-api';
import type { HandoverOptions } from './handover-options';
import {
  replicaTable,
  summaryPlace,
  summaryTable,
  type HandoverTable,
  type TableBlock,
  type TableField,
} from './handover-table';
import type { Bundle } from './open-bundle';
import { provenance } from './provenance';
import { rangeOut } from './replicas-out';
import { writeWhole, type WrittenFile } from './whole-file';

type DuckDB = typeof import('@duckdb/node-api');

/** What DuckDB may hold: row groups in the making, far below it. */
const MEMORY = '256MB';
/** DuckDB's vector size: a chunk holds no more rows. */
const ROWS_A_CHUNK = 2048;

/**
 * Writes two Parquet files (Zstandard): the ensemble as a long table, and beside it the summary of the cells. DuckDB
 * pulls the rows from the bundle while it writes; the file's key-value metadata say where the numbers come from.
 */
export async function writeParquet(bundle: Bundle, options: HandoverOptions): Promise<WrittenFile[]> {
  rangeOut(bundle, options);
  const duckdb = await import('@duckdb/node-api');
  const tables = [replicaTable(bundle, options), summaryTable(bundle)];
  const write = async (paths: string[]): Promise<void> => {
    const instance = await duckdb.DuckDBInstance.create(':memory:', { threads: '2', memory_limit: MEMORY });
    try {
      const connection = await instance.connect();
      for (const [i, table] of tables.entries()) {
        await copyTable(duckdb, connection, `table_${i}`, table, provenance(bundle), paths[i]!);
      }
      connection.closeSync();
    } finally {
      instance.closeSync();
    }
  };
  return writeWhole([options.out, summaryPlace(options.out)], write, options.signal);
}

async function copyTable(
  duckdb: DuckDB,
  connection: DuckDBConnection,
  name: string,
  table: HandoverTable,
  metadata: Record<string, string>,
  path: string,
): Promise<void> {
  // A fault in a callback reaches the query as text alone: the error itself is kept here.
  const fault: { error?: unknown } = {};
  connection.registerTableFunction(rowsFunction(duckdb, name, table, fault));
  const columns: string[] = [];
  for (const [f, field] of table.fields.entries()) {
    columns.push(`${SELECTED[field.type](`c${f}`, `labels_${f}`)} as "${field.name}"`);
    // Texts of a study are bound, never made SQL.
    if (field.type === 'label') await connection.run(`set variable labels_${f} = $1`, [duckdb.listValue(field.labels)]);
  }
  const keys = Object.keys(metadata).map((key, k) => `${key}: $${k + 1}`);
  await connection.run(`set variable metadata = {${keys.join(', ')}}`, Object.values(metadata));
  try {
    // Without a temporary file of DuckDB's own: the path is one already, and what is cancelled must leave nothing.
    const as = `format parquet, compression zstd, use_tmp_file false, kv_metadata getvariable('metadata')`;
    await connection.run(`copy (select ${columns.join(', ')} from ${name}()) to $1 (${as})`, [path]);
  } catch (error) {
    throw fault.error ?? error;
  }
}

/** How a column of the table function becomes one of the file. */
const SELECTED: Record<TableField['type'], (column: string, labels: string) => string> = {
  index: (column) => column,
  number: (column) => column,
  count: (column) => `${column}::bigint`,
  label: (column, labels) => `getvariable('${labels}')[${column} + 1]`,
};

/** A table function of DuckDB that gives the table's rows in order, from one thread, as columns `c0`, `c1`, ... */
function rowsFunction(
  duckdb: DuckDB,
  name: string,
  table: HandoverTable,
  fault: { error?: unknown },
): DuckDBTableFunction {
  const chunks = chunksOf(table);
  return duckdb.DuckDBTableFunction.create({
    name,
    bindFunction: (info) => {
      const type = (field: TableField): DuckDBType => (isWhole(field) ? duckdb.INTEGER : duckdb.DOUBLE);
      table.fields.forEach((field, f) => info.addResultColumn(`c${f}`, type(field)));
      info.setCardinality(table.rows, true);
    },
    initFunction: (info) => info.setMaxThreads(1),
    mainFunction: (info, chunk) => {
      try {
        const next = chunks.next();
        chunk.rowCount = next.done ? 0 : next.value.rows;
        if (!next.done) next.value.values.forEach((values, f) => fillVector(chunk.getColumnVector(f), values));
      } catch (error) {
        fault.error = error;
        info.setError(String(error));
      }
    },
  });
}

/** Fills a vector at once: its own setter goes item by item, and takes most of the time of a large table. */
function fillVector(vector: object, values: Int32Array | Float64Array): void {
  const { items, flush } = vector as { items: Int32Array | Float64Array; flush(): void };
  items.set(values);
  flush.call(vector);
}

function isWhole({ type }: TableField): boolean {
  return type === 'index' || type === 'label';
}

function* chunksOf(table: HandoverTable): Generator<TableBlock> {
  for (const { rows, values } of table.blocks()) {
    for (let first = 0; first < rows; first += ROWS_A_CHUNK) {
      const end = Math.min(first + ROWS_A_CHUNK, rows);
      yield { rows: end - first, values: values.map((column) => column.subarray(first, end)) };
    }
  }
}
