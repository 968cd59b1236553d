import { copyFileSync, mkdtempSync, readFileSync } from 'node:fs';
import { tmpdir } from 'node:os';
import { join } from 'node:path';
import { describe, expect, test } from 'vitest';
import { readerFor } from '../../../src/events/formats';
import { hdf5 } from '../../../src/events/hdf5';
import { inspectFile } from '../../../src/events/inspect';
import { fileOf, gather, needsOf, readAll, refusal } from './gather';
import { made, referenceRow, ROWS } from './reference-rows';

const numbers = Object.keys(referenceRow(0));

describe('an HDF5 file of one data set a column', () => {
  test('gives numbers of any width, byte order and filter as doubles', async () => {
    const { rows, rejects, placesPassed, bytes } = await readAll(
      hdf5,
      made('columns.h5'),
      needsOf(...numbers.map((n) => `run1/${n}`)),
    );
    expect(rejects).toEqual([]);
    expect(rows).toEqual(Array.from({ length: ROWS }, (_, i) => [i + 1, ...Object.values(referenceRow(i))]));
    expect(placesPassed).toBe(ROWS);
    expect(bytes).toBe(readFileSync(made('columns.h5')).length);
  });

  test('gives labels from texts, booleans and integers, exact where no double is', async () => {
    const needs = needsOf('run:text', 'label:text', 'quality:text', 'event:text', 'event:identity');
    const { rows } = await readAll(hdf5, made('columns.h5'), needs);
    const ids = Array.from({ length: ROWS }, (_, i) => String(9007199254740992n + BigInt(i)));
    const csv = fileOf(`id\n${ids.join('\n')}`);
    const keys = (await readAll(await readerFor(csv), csv, needsOf('id:identity'))).rows.map(([, key]) => key);
    expect(rows).toEqual(ids.map((id, i) => [i + 1, `run ${i % 4}`, `é ${i % 5}`, String(i % 3 === 0), id, keys[i]]));
  });

  test('finds a column by its whole path, with a slash before or not, or by its last part where that is clear', async () => {
    const first = async (name: string) => (await readAll(hdf5, made('columns.h5'), needsOf(name))).rows[1][1];
    expect(await first('/run1/e_tag')).toBe(0.25);
    expect(await first('run2/e_tag')).toBe(0.5);
    expect(await first('swapped')).toBe(-499);
    const plan = (...names: string[]) => refusal(hdf5.plan(made('columns.h5'), 'events', needsOf(...names), 1));
    expect(await plan('e_tag')).toBe(
      'InputError: events: several columns end in "e_tag": name one of run1/e_tag, run2/e_tag',
    );
    expect(await plan('run1/e_tag', 'run2/e_tag')).toBe(
      'InputError: events: column "run1/e_tag" has 1000 rows, "run2/e_tag" has 10 rows: choose columns of the same table',
    );
    expect(await plan('nothing')).toMatch(/^InputError: events: no column "nothing": the columns are alias, run1\/big/);
    expect(await plan('matrix')).toMatch(/column "matrix" holds 2 dimensions/);
    expect(await plan('scalar')).toMatch(/no column "scalar"/);
  });

  test('gives the same rows however it is cut', async () => {
    const needs = needsOf('run1/e_tag', 'label:text');
    const [unit] = await hdf5.plan(made('columns.h5'), 'events', needs, 8);
    const cut = (from: number, to: number) => ({ ...unit, detail: { ...(unit.detail as object), from, to, step: 7 } });
    const pieces = await gather(hdf5, [cut(0, 300), cut(300, 301), cut(301, ROWS)], needs);
    const whole = await gather(hdf5, [unit], needs);
    expect(pieces.rows).toEqual(whole.rows);
    expect(pieces.placesPassed).toBe(ROWS);
  });
});

describe('an HDF5 file of one compound table', () => {
  test('gives its members, big-endian ones among them', async () => {
    const { rows } = await readAll(hdf5, made('table.h5'), needsOf(...numbers, 'events/table:run:text', 'event:text'));
    const expected = (i: number) => [
      i + 1,
      ...Object.values(referenceRow(i)),
      `run ${i % 4}`,
      String(9007199254740992n + BigInt(i)),
    ];
    expect(rows).toEqual(Array.from({ length: ROWS }, (_, i) => expected(i)));
  });

  test('refuses a member that is no single value', async () => {
    const plan = refusal(hdf5.plan(made('table.h5'), 'events', needsOf('pair'), 1));
    expect(await plan).toBe('InputError: events: column "pair" holds arrays: choose one of single numbers or texts');
  });
});

describe('an HDF5 file that cannot serve is refused in one line', () => {
  test('when it would make another file be read: by a link, a virtual data set, or raw data kept outside', async () => {
    const outward = made('outward.h5');
    expect((await readAll(hdf5, outward, needsOf('t'))).rows.length).toBe(8);
    expect(await refusal(readAll(hdf5, outward, needsOf('link')))).toMatch(/no column "link"/);
    for (const name of ['raw', 'virtual']) {
      expect(await refusal(readAll(hdf5, outward, needsOf(name))), name).toMatch(
        /points at another file, .*plain.h5|column "virtual" holds data of other files/,
      );
    }
  });

  test('when it is truncated, damaged or something else', async () => {
    const bytes = readFileSync(made('columns.h5'));
    for (const content of [
      bytes.subarray(0, bytes.length / 2),
      bytes.subarray(0, 9),
      Buffer.from('no HDF5'),
      Buffer.alloc(0),
    ]) {
      const path = fileOf(content, '.h5');
      expect((await readerFor(path)).format).toBe('hdf5');
      expect(await refusal(readAll(hdf5, path, needsOf('run1/e_tag')))).toMatch(
        /^InputError: events: damaged or no HDF5 \(.+; \d+ bytes\)/,
      );
    }
    const table = readFileSync(made('table.h5'));
    const damaged = Buffer.from(table);
    // Inside the compressed chunks, behind the heads and B-trees of the file.
    damaged.fill(0x55, table.length - 9000, table.length - 8000);
    expect(await refusal(readAll(hdf5, fileOf(damaged, '.h5'), needsOf('short')))).toMatch(
      /^InputError: events: damaged or no HDF5/,
    );
  });

  test('when it claims more rows than so few bytes can hold', async () => {
    const { default: library } = await import('h5wasm/node');
    await library.ready;
    const path = join(mkdtempSync(join(tmpdir(), 'entasis-hdf5-')), 'claim.h5');
    const file = new library.File(path, 'w');
    file.create_dataset({ name: 't', data: new Float64Array(8), maxshape: [null], chunks: [1024] }).resize([1e13]);
    file.close();
    expect(await refusal(hdf5.plan(path, 'events', needsOf('t'), 1))).toMatch(
      /"t" claims 10000000000000 rows in a file of \d+ bytes/,
    );
  });

  test('and is told by its content whatever its name', async () => {
    const path = fileOf('', '.dat');
    copyFileSync(made('plain.h5'), path);
    expect((await readerFor(path)).format).toBe('hdf5');
  });
});

describe('inspecting an HDF5 file', () => {
  test('tells the columns of the longest table, by the last part of the name where that is clear', async () => {
    const { rows, columns, format } = await inspectFile(made('columns.h5'));
    expect([rows, format]).toEqual([ROWS, 'hdf5']);
    expect(columns.map(({ name }) => name)).toEqual([
      ...[
        'alias',
        'big',
        'e_cluster',
        'run1/e_tag',
        'event',
        'label',
        'quality',
        'run',
        'short',
        'swapped',
        'unsigned',
      ],
    ]);
    expect(columns.find(({ name }) => name === 'e_cluster')).toMatchObject({ type: 'number', missing: 100, least: 0 });
    expect(columns.find(({ name }) => name === 'run')!.labels).toEqual(['run 0', 'run 1', 'run 2', 'run 3']);
  });
});
