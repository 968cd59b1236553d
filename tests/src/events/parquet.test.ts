import { DuckDBInstance, type DuckDBConnection } from '@duckdb/node-api';
import { copyFileSync, readFileSync, writeFileSync } from 'node:fs';
import { beforeAll, describe, expect, test } from 'vitest';
import { readerFor } from '../../../src/events/formats';
import { inspectFile } from '../../../src/events/inspect';
import { parquet } from '../../../src/events/parquet';
import { fileOf, needsOf, readAll, type Gathered, refusal } from './gather';

let connection: DuckDBConnection;

beforeAll(async () => {
  connection = await (await DuckDBInstance.create(':memory:')).connect();
});

async function table(select: string, options = ''): Promise<string> {
  const path = fileOf('', '.parquet');
  await connection.run(`COPY (${select}) TO '${path}' (FORMAT PARQUET${options})`);
  return path;
}

async function read(select: string, ...columns: string[]): Promise<Gathered> {
  return readAll(parquet, await table(select), needsOf(...columns));
}

describe('a Parquet file', () => {
  test('gives its rows in order, over many row groups, and its bytes as progress', async () => {
    const path = await table('SELECT i::DOUBLE / 4 AS t, -i AS r FROM range(100000) x(i)', ', ROW_GROUP_SIZE 3000');
    const { rows, rejects, bytes, placesPassed } = await readAll(parquet, path, needsOf('r', 't'));
    expect(rejects).toEqual([]);
    expect(rows.length).toBe(100_000);
    expect(rows.every(([place, r, t], i) => place === i + 1 && r === -i && t === i / 4)).toBe(true);
    expect(placesPassed).toBe(100_000);
    expect(bytes).toBe(readFileSync(path).length);
  });

  test('gives numbers of any width as the nearest doubles, booleans as 0 and 1, NULL and NaN as missing', async () => {
    const types = 'TINYINT SMALLINT INTEGER BIGINT HUGEINT UTINYINT USMALLINT UINTEGER UBIGINT FLOAT DOUBLE BOOLEAN';
    const names = [...types.split(' '), 'DECIMAL(15,3)', 'DECIMAL(4,2)', 'DECIMAL(38,10)'];
    const columns = names.map((type, i) => `CASE WHEN i < 2 THEN i::${type} END AS c${i}`).join(', ');
    const { rows } = await read(`SELECT ${columns} FROM range(3) x(i)`, ...names.map((_, i) => `c${i}`));
    expect(rows.map(([, ...values]) => values)).toEqual([names.map(() => 0), names.map(() => 1), names.map(() => NaN)]);
    const exact = await read(
      `SELECT 0.1::DECIMAL(15,3) AS a, 123456789012.345::DECIMAL(15,3) AS b, 1234567890123456789.1234567891::DECIMAL(38,10) AS c,
       9007199254740993::BIGINT AS d, 'NaN'::DOUBLE AS e, '-inf'::DOUBLE AS f, 0.1::FLOAT AS g`,
      ...'abcdefg',
    );
    const expected = [0.1, 123456789012.345, 1234567890123456789.1234567891, 9007199254740992, NaN, -Infinity];
    expect(exact.rows).toEqual([[1, ...expected, Math.fround(0.1)]]);
  });

  test('gives the numbers written in a text column, and rejects its other rows one by one', async () => {
    const { rows, rejects } = await read(
      `SELECT * FROM (VALUES (1, ' 1.5 '), (2, 'x'), (3, NULL), (4, ''), (5, '1e3'), (6, '0x1')) v(r, t)`,
      't',
      'r',
    );
    expect(rows).toEqual([
      [1, 1.5, 1],
      [3, NaN, 3],
      [4, NaN, 4],
      [5, 1000, 5],
    ]);
    expect(rejects).toEqual([
      { place: 2, column: 't', value: 'x', reason: 'not a number' },
      { place: 6, column: 't', value: '0x1', reason: 'not a number' },
    ]);
  });

  test('gives labels from texts, numbers and dates', async () => {
    const { rows } = await read(
      `SELECT * FROM (VALUES ('a', 1, 0.5::DOUBLE, true, DATE '2026-12-01', 12345678901234567890::UBIGINT),
        (NULL, NULL, NULL, NULL, NULL, NULL), (' a ', 1, 2.0, false, DATE '2026-12-01', 7)) v(a, b, c, d, e, f)`,
      ...[...'abcdef'].map((name) => `${name}:text`),
    );
    expect(rows).toEqual([
      [1, 'a', '1', '0.5', 'true', '2026-12-01', '12345678901234567890'],
      [2, null, null, null, null, null, null],
      [3, 'a', '1', '2', 'false', '2026-12-01', '7'],
    ]);
  });

  test('gives the same identities as a table of text', async () => {
    const values = [
      '42',
      '-7',
      '999999999999999',
      '1000000000000000',
      '-9223372036854775808',
      '9223372036854775807',
      '0',
    ];
    const csv = fileOf(`id\n${values.join('\n')}\n`);
    const fromText = await readAll(await readerFor(csv), csv, needsOf('id:identity'));
    for (const type of ['BIGINT', 'VARCHAR']) {
      const select = `SELECT v::${type} AS id FROM (VALUES ${values.map((v) => `('${v}')`).join(', ')}) x(v)`;
      const { rows } = await read(select, 'id:identity');
      expect(rows.map(([, key]) => key)).toEqual(fromText.rows.map(([, key]) => key));
    }
    const short = await read(`SELECT v::DOUBLE AS id FROM (VALUES (42), (-7), (NULL)) x(v)`, 'id:identity');
    expect(short.rows.map(([, key]) => key)).toEqual([...fromText.rows.slice(0, 2).map(([, key]) => key), null]);
  });

  test('may have any text as its name and as names of columns: none of it becomes SQL', async () => {
    const odd = `a"; DROP TABLE x; --'`;
    const path = await table(`SELECT 1.5 AS "${odd.replace('"', '""')}", 2 AS "e's"`);
    for (const name of [`o'dd" $1 [1]*?.parquet`, `); SELECT 1; --.parquet`]) {
      const copy = path.replace(/[^/]+$/, name);
      copyFileSync(path, copy);
      const { rows } = await readAll(parquet, copy, needsOf(odd, "e's"));
      expect(rows).toEqual([[1, 1.5, 2]]);
    }
    const beside = path.replace(/[^/]+$/, '*.parquet');
    expect(await refusal(parquet.columns(beside))).toMatch(/cannot be read \(ENOENT\)/);
  });

  test('is not read as more than it holds: a folder named like a partition adds no column', async () => {
    const { mkdirSync } = await import('node:fs');
    const path = await table('SELECT 1 AS t');
    const folder = path.replace(/[^/]+$/, 'run=3');
    mkdirSync(folder, { recursive: true });
    copyFileSync(path, `${folder}/a.parquet`);
    expect(await parquet.columns(`${folder}/a.parquet`)).toEqual([{ name: 't', type: 'number' }]);
  });

  test('without rows gives none', async () => {
    expect((await read('SELECT 1 AS t WHERE false', 't')).rows).toEqual([]);
  });

  test('is told by its content whatever its name', async () => {
    const path = await table('SELECT 1 AS t');
    copyFileSync(path, `${path}.csv`);
    expect((await readerFor(`${path}.csv`)).format).toBe('parquet');
  });
});

describe('a large Parquet file', () => {
  test('is cut between its groups of rows where there are enough of them, and its units share one database', async () => {
    const path = await table('SELECT i AS t, i / 2 AS r FROM range(2500000) x(i)', ', ROW_GROUP_SIZE 122880');
    const needs = needsOf('t', 'r');
    const units = await parquet.plan(path, 'events', needs, 8);
    expect(units.map(({ rowsBefore }) => rowsBefore)).toEqual([0, 10 * 122880]);
    const sums = await Promise.all(
      units.map(async (unit) => {
        let [rows, sum] = [0, 0];
        for await (const batch of parquet.read(unit, needs)) {
          rows += batch.rows;
          const [t] = batch.columns;
          if (t.as === 'number') for (const value of t.values) sum += value;
        }
        return { rows, sum };
      }),
    );
    expect(sums.reduce((all, { rows }) => all + rows, 0)).toBe(2_500_000);
    expect(sums.reduce((all, { sum }) => all + sum, 0)).toBe((2_500_000 * 2_499_999) / 2);
  });

  test('of one group is cut all the same', async () => {
    const path = await table('SELECT i AS t, i AS r FROM range(2100000) x(i)', ', ROW_GROUP_SIZE 4000000');
    const units = await parquet.plan(path, 'events', needsOf('t', 'r'), 8);
    expect(units.map(({ rowsBefore }) => rowsBefore)).toEqual([0, 1_050_000]);
  });
});

describe('a Parquet file that cannot serve is refused in one line', () => {
  test('when a needed column is absent or of an unsuitable type', async () => {
    const path = await table(`SELECT 1 AS t, [1, 2] AS list, DATE '2026-12-01' AS day, {'a': 1} AS s`);
    const plan = (...columns: string[]) => refusal(parquet.plan(path, 'events', needsOf(...columns), 1));
    expect(await plan('T')).toBe('InputError: events: no column "T": the columns are t, list, day, s');
    expect(await plan('list')).toMatch(/events: column "list" holds INTEGER\[\]: choose a column of numbers/);
    expect(await plan('day')).toMatch(/events: column "day" holds DATE: choose a column of numbers/);
    expect(await plan('s:text')).toMatch(/events: column "s" holds STRUCT\(.*\): choose a column of single values/);
  });

  test('when it is truncated, empty, or no Parquet at all', async () => {
    const path = await table('SELECT i AS t, random() AS r FROM range(100000) x(i)');
    const bytes = readFileSync(path);
    for (const content of [
      bytes.subarray(0, bytes.length - 1),
      bytes.subarray(0, bytes.length / 2),
      bytes.subarray(0, 4),
    ]) {
      const bad = fileOf(content, '.parquet');
      expect(await refusal(parquet.plan(bad, 'events', needsOf('t'), 1))).toMatch(
        /^InputError: events: damaged or unreadable \(/,
      );
    }
  });

  test('when its middle is damaged: the rows before are not taken for the whole', async () => {
    const path = await table('SELECT i AS t, random() AS r FROM range(300000) x(i)', ', ROW_GROUP_SIZE 20000');
    const [unit] = await parquet.plan(path, 'events', needsOf('t', 'r'), 1);
    const bytes = Buffer.from(readFileSync(path));
    bytes.fill(0xff, bytes.length >> 1, (bytes.length >> 1) + 40_000);
    writeFileSync(path, bytes);
    const work = (async () => {
      for await (const batch of parquet.read(unit, needsOf('t', 'r'))) expect(batch.rows).toBeGreaterThan(0);
    })();
    expect(await refusal(work)).toMatch(/^InputError: events: damaged or unreadable( behind row \d+)? \(/);
  });

  test('and a cancelled reading ends as cancelled', async () => {
    const path = await table('SELECT i AS t FROM range(2000000) x(i)');
    const [unit] = await parquet.plan(path, 'events', needsOf('t'), 1);
    const stop = new AbortController();
    const work = (async () => {
      for await (const batch of parquet.read(unit, needsOf('t'), stop.signal)) {
        expect(batch.rows).toBeGreaterThan(0);
        stop.abort();
      }
    })();
    expect(await refusal(work)).toBe('Cancelled: cancelled');
  });
});

describe('inspecting a Parquet file', () => {
  test('tells every column', async () => {
    const path = await table(
      `SELECT CASE WHEN i > 0 THEN i END AS t, 'run ' || (i % 3) AS run, CASE i WHEN 4 THEN 'inf'::DOUBLE ELSE -i END AS w,
       'event ' || i AS event FROM range(5000) x(i)`,
    );
    const { rows, rejected, format, columns } = await inspectFile(path);
    expect({ rows, rejected, format }).toEqual({ rows: 5000, rejected: 0, format: 'parquet' });
    expect(columns).toEqual([
      { name: 't', type: 'number', missing: 1, malformed: 0, nonFinite: 0, least: 1, greatest: 4999, labels: null },
      {
        name: 'run',
        type: 'text',
        missing: 0,
        malformed: 0,
        nonFinite: 0,
        least: null,
        greatest: null,
        labels: ['run 0', 'run 1', 'run 2'],
      },
      { name: 'w', type: 'number', missing: 0, malformed: 0, nonFinite: 1, least: -4999, greatest: 0, labels: null },
      {
        name: 'event',
        type: 'text',
        missing: 0,
        malformed: 0,
        nonFinite: 0,
        least: null,
        greatest: null,
        labels: null,
      },
    ]);
  });
});
