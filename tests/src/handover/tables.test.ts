import { readdirSync, readFileSync, rmSync, truncateSync, writeFileSync } from 'node:fs';
import { join } from 'node:path';
import { DuckDBInstance } from '@duckdb/node-api';
import { tableFromIPC } from '@uwdata/flechette';
import { afterAll, beforeAll, describe, expect, it } from 'vitest';
import { npyBytes } from '../../../src/handover/npy';
import { openBundle, readCells, replicaBlocks, type Bundle } from '../../../src/handover/open-bundle';
import { writeArrow } from '../../../src/handover/write-arrow';
import { writeCsv } from '../../../src/handover/write-csv';
import { writeParquet } from '../../../src/handover/write-parquet';
import { Cancelled, InputError } from '../../../src/study/input-error';
import { makeBundle } from './make-bundle';
import { hasPython, python } from './python';

let bundle: Bundle;
let empty: Bundle;
beforeAll(async () => {
  // 98 columns by 100 outcomes and 61 replicas: several blocks, several chunks of DuckDB.
  const axes = { true: { from: 0, to: 1, bins: 96 }, reconstructed: { label: "o'clock", from: 0, to: 1, bins: 97 } };
  bundle = openBundle(await makeBundle({ replicas: 61, weighted: true, axes }));
  empty = openBundle(await makeBundle({ replicas: 0 }));
});
afterAll(() => [bundle, empty].forEach(({ folder }) => rmSync(folder, { recursive: true })));

const WRITERS = { csv: writeCsv, arrow: writeArrow, parquet: writeParquet };
const bits = (values: Float64Array): string => npyBytes('<f8', values).toString('hex');
const replicas = (from: number, to: number): Float64Array =>
  Float64Array.from([...replicaBlocks(bundle, from, to)].flatMap(({ values }) => [...values]));

/** The long table as any reader should see it. */
interface Long {
  replica: ArrayLike<number>;
  column: ArrayLike<string>;
  outcome: ArrayLike<string>;
  p: Float64Array;
}

function expectLong(long: Long, from: number, to: number): void {
  expect(bits(long.p) === bits(replicas(from, to))).toBe(true);
  const [columns, outcomes] = [bundle.columns.length, bundle.outcomes.length];
  const wrong = Array.from(long.p.keys()).filter((i) => {
    const cell = i % (columns * outcomes);
    const column = bundle.columns[Math.floor(cell / outcomes)];
    const replica = from + Math.floor(i / (columns * outcomes));
    return (
      long.replica[i] !== replica || long.column[i] !== column || long.outcome[i] !== bundle.outcomes[cell % outcomes]
    );
  });
  expect(wrong).toEqual([]);
}

async function duckdb(sql: string, path: string): Promise<Record<string, unknown[]>> {
  const instance = await DuckDBInstance.create(':memory:');
  const connection = await instance.connect();
  const result = await connection.runAndReadAll(sql, [path]);
  const columns = result.getColumnsObject() as Record<string, unknown[]>;
  connection.closeSync();
  instance.closeSync();
  return columns;
}

describe('the long table', () => {
  it('reads back to the bit from Parquet, in the order of the array, by DuckDB', async () => {
    const out = join(bundle.folder, "it's.parquet");
    const files = await writeParquet(bundle, { out, replicas: { from: 3, to: 60 } });
    expect(files.map(({ path }) => path)).toEqual([out, join(bundle.folder, "it's-summary.parquet")]);
    const read = await duckdb('select * from read_parquet($1)', out);
    expect(Object.keys(read)).toEqual(['replica', 'column', 'outcome', 'p']);
    expectLong({ ...(read as unknown as Long), p: Float64Array.from(read['p'] as number[]) }, 3, 60);
    const meta = await duckdb('select decode(key) as key, decode(value) as value from parquet_kv_metadata($1)', out);
    const at = meta['key']!.indexOf('reconstructed_axis');
    expect(meta['value']![at]).toBe("o'clock");
  });

  it('reads back to the bit from Arrow, by another implementation than the one that writes', async () => {
    const out = join(bundle.folder, 'a.arrow');
    await writeArrow(bundle, { out, replicas: { from: 3, to: 60 } });
    const table = tableFromIPC(readFileSync(out));
    expect(table.names).toEqual(['replica', 'column', 'outcome', 'p']);
    const read = table.toColumns() as unknown as Long;
    expectLong({ ...read, p: Float64Array.from(read.p) }, 3, 60);
    expect(table.schema.metadata?.get('study_fingerprint')).toBe(bundle.manifest.study.fingerprint);
  });

  it('reads back to the bit from CSV, by DuckDB', async () => {
    const out = join(bundle.folder, 'a.csv');
    await writeCsv(bundle, { out, replicas: { from: 58, to: 60 } });
    const read = await duckdb('select * from read_csv($1, header = true)', out);
    const replica = (read['replica'] as bigint[]).map(Number);
    expectLong({ ...(read as unknown as Long), replica, p: Float64Array.from(read['p'] as number[]) }, 58, 60);
  });

  it.skipIf(!hasPython('pandas'))('reads back to the bit from CSV, by pandas', async () => {
    const out = join(bundle.folder, 'b.csv');
    await writeCsv(bundle, { out, replicas: { from: 7, to: 8 } });
    const script = `
import json, sys, pandas
t = pandas.read_csv(sys.argv[1], float_precision="round_trip")
print(json.dumps([list(t.columns), t.p.to_numpy().tobytes().hex()]))`;
    expect(python(script, out)).toEqual([['replica', 'column', 'outcome', 'p'], bits(replicas(7, 8))]);
  });
});

describe('the summary table', () => {
  const FIELDS = ['events', 'weight', 'squared_weight', 'shape', 'scale', 'mean', 'sd', 'lower', 'upper'];
  const ARRAYS = ['tally/counts', 'tally/weights', 'tally/squares', 'posterior/shape', 'posterior/scale'].concat([
    'posterior/mean',
    'posterior/sd',
    'posterior/lower',
    'posterior/upper',
  ]);

  it('stands beside the long table with every cell, to the bit, in all three formats', async () => {
    for (const [ending, write] of Object.entries(WRITERS)) {
      const out = join(bundle.folder, `s.${ending}`);
      await write(bundle, { out, replicas: { from: 0, to: 1 } });
      const place = join(bundle.folder, `s-summary.${ending}`);
      const read =
        ending === 'arrow'
          ? (tableFromIPC(readFileSync(place)).toColumns() as Record<string, ArrayLike<unknown>>)
          : await duckdb(`select * from ${ending === 'csv' ? 'read_csv' : 'read_parquet'}($1)`, place);
      expect(Object.keys(read)).toEqual(['column', 'outcome', ...FIELDS]);
      FIELDS.forEach((field, i) => {
        const values = Float64Array.from(Array.from(read[field] as ArrayLike<number | bigint>, Number));
        expect(bits(values) === bits(readCells(bundle, ARRAYS[i]!)), `${ending} ${field}`).toBe(true);
      });
    }
  });
});

describe('every table writer', () => {
  it('gives the same bytes for the same bundle', async () => {
    for (const [ending, write] of Object.entries(WRITERS)) {
      const range = { from: 0, to: 5 };
      const first = await write(bundle, { out: join(bundle.folder, `1.${ending}`), replicas: range });
      const second = await write(bundle, { out: join(bundle.folder, `2.${ending}`), replicas: range });
      expect(second.map(({ sha256 }) => sha256)).toEqual(first.map(({ sha256 }) => sha256));
    }
  });

  it('writes an ensemble without replicas as an empty table with its fields', async () => {
    await writeArrow(empty, { out: join(empty.folder, 'e.arrow') });
    expect(tableFromIPC(readFileSync(join(empty.folder, 'e.arrow')))).toMatchObject({ numRows: 0, numCols: 4 });
    await writeParquet(empty, { out: join(empty.folder, 'e.parquet') });
    const fields = 'select column_name as name, column_type as type from (describe from read_parquet($1))';
    const read = await duckdb(fields, join(empty.folder, 'e.parquet'));
    expect(read).toEqual({
      name: ['replica', 'column', 'outcome', 'p'],
      type: ['INTEGER', 'VARCHAR', 'VARCHAR', 'DOUBLE'],
    });
    expect(await duckdb('select * from read_parquet($1)', join(empty.folder, 'e.parquet'))).toEqual({});
    await writeCsv(empty, { out: join(empty.folder, 'e.csv') });
    expect(readFileSync(join(empty.folder, 'e.csv'), 'utf8')).toBe('replica,column,outcome,p\n');
  });

  it('leaves nothing behind when it is cancelled in the middle, or its bundle is damaged', async () => {
    const damaged = openBundle(await makeBundle());
    truncateSync(join(damaged.folder, 'replicas.npy'), 500);
    const before = readdirSync(empty.folder);
    for (const [ending, write] of Object.entries(WRITERS)) {
      const out = join(empty.folder, `c.${ending}`);
      writeFileSync(out, 'before');
      const stop = new AbortController();
      const late = write(bundle, { out, signal: stop.signal, onProgress: () => stop.abort() });
      await expect(late, ending).rejects.toThrow(Cancelled);
      await expect(write(damaged, { out }), ending).rejects.toThrow(InputError);
      expect(readFileSync(out, 'utf8')).toBe('before');
      rmSync(out);
    }
    expect(readdirSync(empty.folder)).toEqual(before);
    rmSync(damaged.folder, { recursive: true });
  });
});
