import { createWriteStream, readFileSync } from 'node:fs';
import { pipeline } from 'node:stream/promises';
import { ZipFile } from 'yazl';
import { describe, expect, test } from 'vitest';
import type { Reader } from '../../../src/events/batch';
import { readerFor } from '../../../src/events/formats';
import { inspectFile } from '../../../src/events/inspect';
import { npy } from '../../../src/events/npy';
import { npz } from '../../../src/events/npz';
import { parsePythonLiteral } from '../../../src/events/python-literal';
import { fileOf, gather, needsOf, readAll, refusal } from './gather';
import { made, referenceRow, ROWS } from './reference-rows';

const failing = (reader: Reader, content: Uint8Array, ...columns: string[]): Promise<string> =>
  refusal(readAll(reader, fileOf(content, `.${reader.format}`), needsOf(...columns)));

/** The table of make.py has a column of 16-bit floats besides. */
const row = (i: number) => ({ ...referenceRow(i), half: i / 2 });
const numbers = Object.keys(row(0));
const labels = ['run:text', 'name:text', 'quality:text', 'event:text'];
const expected = Array.from({ length: ROWS }, (_, i) => {
  const texts = [`run ${i % 4}`, `é ${i % 5}`, String(i % 3 === 0), String(9007199254740992n + BigInt(i))];
  return [i + 1, ...Object.values(row(i)), ...texts];
});

describe('a structured NPY array', () => {
  test('gives numbers of any width and byte order as doubles, texts as labels, padded or not', async () => {
    const { rows, rejects, bytes, placesPassed } = await readAll(
      npy,
      made('table.npy'),
      needsOf(...numbers, ...labels),
    );
    expect(rejects).toEqual([]);
    expect(rows).toEqual(expected);
    expect(placesPassed).toBe(ROWS);
    expect(bytes).toBe(readFileSync(made('table.npy')).length);
  });

  test('of version 2 and 3 is read as well, Greek names among its columns', async () => {
    expect((await readAll(npy, made('version3.npy'), needsOf('ε', 'r'))).rows).toEqual([[1, 1.5, 2]]);
    const { rows } = await readAll(npy, made('version2.npy'), needsOf('e_tag', 'run:text'));
    expect(rows).toEqual(Array.from({ length: 20 }, (_, i) => [i + 1, i / 4, `run ${i % 4}`]));
  });

  test('gives the same rows however it is cut', async () => {
    const needs = needsOf('e_tag', 'run:text');
    const [unit] = await npy.plan(made('table.npy'), 'events', needs, 8);
    const cut = (from: number, to: number) => ({ ...unit, detail: { ...(unit.detail as object), from, to } });
    const pieces = await gather(npy, [cut(0, 300), cut(300, 301), cut(301, ROWS)], needs);
    expect(pieces.rows).toEqual((await gather(npy, [unit], needs)).rows);
  });

  test('that breaks off, or is followed by anything, stops with the place', async () => {
    const bytes = readFileSync(made('table.npy'));
    for (const length of [bytes.length - 1, 5000, 40, 9, 0]) {
      expect(await failing(npy, bytes.subarray(0, length), 'e_tag')).toMatch(
        /^InputError: events: (truncated: it ends at byte \d+, not at 120384|damaged or no NPY array \(it breaks off in its header\))/,
      );
    }
    expect(await failing(npy, Buffer.concat([bytes, bytes]), 'e_tag')).toMatch(
      /its array ends at byte 120384, others follow/,
    );
  });

  test('is refused clearly where it has no columns, or holds what is no single value', async () => {
    expect(await failing(npy, readFileSync(made('plain.npy')), 't')).toMatch(
      /a plain array: its columns have no names/,
    );
    expect(await failing(npy, readFileSync(made('objects.npy')), 't')).toMatch(/holds Python objects/);
    expect(await failing(npy, readFileSync(made('table.npy')), 'pair')).toMatch(/column "pair" holds arrays/);
    expect(await failing(npy, readFileSync(made('table.npy')), 'z')).toMatch(/column "z" holds complex numbers/);
    expect(await failing(npy, readFileSync(made('table.npy')), 'x')).toMatch(/no column "x": the columns are e_tag, /);
  });

  test('with a hostile header is refused in one line and quickly', async () => {
    const header = (text: string, version = 1): Buffer => {
      const length = Buffer.alloc(version === 1 ? 2 : 4);
      if (version === 1) length.writeUInt16LE(text.length);
      else length.writeUInt32LE(text.length);
      return Buffer.concat([
        Buffer.from(`\x93NUMPY${String.fromCharCode(version)}\0`, 'latin1'),
        length,
        Buffer.from(text),
      ]);
    };
    const described = (descr: string, shape: string) =>
      header(`{'descr': ${descr}, 'fortran_order': False, 'shape': ${shape}, }`);
    const cases: [Buffer, RegExp][] = [
      [described("[('t', '<f8')]", '(9007199254740991,)'), /truncated/],
      [described("[('t', '<f8')]", '(1e400,)'), /no shape/],
      [described("[('t', '<f8')]", '(-1,)'), /no shape/],
      [described("[('t', '<f8', (99999999999,))]", '(10,)'), /holds arrays|truncated/],
      [described("[('t', '<S0')]", '(99999999999,)'), /holds numbers of 0 bytes/],
      [described("[('t', '<q8')]", '(1,)'), /a type "<q8"/],
      [described('__import__("os").system("true")', '(1,)'), /unexpected _/],
      [described(`${'['.repeat(5000)}${']'.repeat(5000)}`, '(1,)'), /unexpected/],
      [header('x'.repeat(10)), /unexpected x/],
      [Buffer.from('\x93NUMPY\x02\0\xff\xff\xff\x7f....', 'latin1'), /a header of 2147483647 bytes/],
      [Buffer.from('\x93NUMPY\x09\0........', 'latin1'), /version 9/],
    ];
    for (const [content, message] of cases) expect(await failing(npy, content, 't')).toMatch(message);
  });
});

describe('an NPZ archive of one array a column', () => {
  test('gives its arrays row by row, deflated', async () => {
    const { rows, placesPassed, bytes } = await readAll(npz, made('columns.npz'), needsOf(...numbers, ...labels));
    expect(rows).toEqual(expected);
    expect(placesPassed).toBe(ROWS);
    expect(bytes).toBe(readFileSync(made('columns.npz')).length);
  });

  test('or stored, with fields of structured arrays by their whole name or the last part of it', async () => {
    for (const name of ['e_tag', 'events:e_tag']) {
      const { rows } = await readAll(npz, made('stored.npz'), needsOf('t', name, 'run:text'));
      expect(rows).toEqual(Array.from({ length: 20 }, (_, i) => [i + 1, i / 4, i / 4, `run ${i % 4}`]));
    }
  });

  test('is refused clearly where a column is absent, has dimensions, or another length', async () => {
    const content = readFileSync(made('columns.npz'));
    expect(await failing(npz, content, 'x')).toMatch(/no column "x": the columns are e_tag, /);
    expect(await failing(npz, content, 'matrix')).toMatch(/column "matrix" holds an array of 2 dimensions/);
    expect(await failing(npz, content, 'e_tag', 'short_one')).toMatch(/"e_tag" has 1000 rows, "short_one" has 5 rows/);
  });

  test('that breaks off stops, and so does any damage to its data, with the entry', async () => {
    const content = readFileSync(made('columns.npz'));
    for (const length of [content.length - 1, content.length / 2, 30]) {
      expect(await failing(npz, content.subarray(0, length), 'e_tag')).toMatch(
        /^InputError: events: damaged zip archive/,
      );
    }
    const stored = readFileSync(made('stored.npz'));
    const bad = Buffer.from(stored);
    bad[bad.indexOf('NUMPY') + 150] ^= 1;
    expect(await failing(npz, bad, 't')).toMatch(
      /damaged zip archive \("t.npy" at byte 0, its checksum does not match\)/,
    );
    const deflated = Buffer.from(content);
    deflated.fill(0x55, 300, 340);
    expect(await failing(npz, deflated, 'e_tag')).toMatch(/^InputError: events: (damaged|truncated)/);
  });
});

/** A zip archive of these entries, written by yazl and then changed byte for byte. */
async function zipOf(entries: Record<string, Uint8Array>, change = (bytes: Buffer) => bytes): Promise<Buffer> {
  const zip = new ZipFile();
  for (const [name, content] of Object.entries(entries)) zip.addBuffer(Buffer.from(content), name);
  zip.end();
  const path = fileOf('', '.zip');
  await pipeline(zip.outputStream, createWriteStream(path));
  return change(readFileSync(path));
}

describe('a hostile zip archive is refused in one line and quickly', () => {
  const array = readFileSync(made('plain.npy'));

  test('when a name leads out of it', async () => {
    const swap = (from: string, to: string) => (bytes: Buffer) =>
      Buffer.from(bytes.toString('latin1').replaceAll(from, to), 'latin1');
    for (const [from, to] of [
      ['aaaa.npy', '../a.npy'],
      ['aaaa.npy', '/aaa.npy'],
      ['aaaa.npy', 'C:/a.npy'],
    ]) {
      const content = await zipOf({ 'aaaa.npy': array }, swap(from, to));
      expect(await failing(npz, content, 'aaaa')).toMatch(
        /damaged zip archive \((invalid relative path|absolute path)/,
      );
    }
  });

  test('when an entry claims to grow beyond what deflate can', async () => {
    const content = await zipOf({ 't.npy': array }, (bytes) => {
      const directory = bytes.indexOf('PK\x01\x02', 0, 'latin1');
      bytes.writeUInt32LE(0xfffffff0, directory + 24);
      return bytes;
    });
    expect(await failing(npz, content, 't')).toMatch(/"t.npy" claims 4294967280 bytes out of \d+/);
  });

  test('when entries overlap each other', async () => {
    const content = await zipOf({ 't.npy': new Uint8Array(2000).map((_, i) => (i * i * 31) >> 3) }, (bytes) => {
      const directory = bytes.indexOf('PK\x01\x02', 0, 'latin1');
      const end = bytes.indexOf('PK\x05\x06', 0, 'latin1');
      const again = Buffer.from(bytes.subarray(directory, end));
      again.write('u', 46);
      const tail = Buffer.from(bytes.subarray(end));
      tail.writeUInt16LE(2, 8);
      tail.writeUInt16LE(2, 10);
      tail.writeUInt32LE(2 * again.length, 12);
      return Buffer.concat([bytes.subarray(0, end), again, tail]);
    });
    expect(await failing(npz, content, 't')).toMatch(/its entries overlap each other/);
  });

  test('when an array holds less than its header tells', async () => {
    const content = await zipOf({ 't.npy': array.subarray(0, array.length - 8) });
    expect(await failing(npz, content, 't')).toMatch(/"t.npy" holds 160 bytes where its header tells 168/);
  });

  test('when it is no zip at all, or empty', async () => {
    expect(await failing(npz, Buffer.from('PK\x03\x04 and no more'), 't')).toMatch(/damaged zip archive/);
    expect(await failing(npz, await zipOf({}), 't')).toMatch(/no column "t": the columns are none/);
  });
});

describe('the header of an array', () => {
  test('is read as a Python literal, nothing in it executed', () => {
    expect(
      parsePythonLiteral(`{'a': [(1, -2.5e3,), "x\\'\\u03b5", True, False, None, ()], u'b': {}, 'c': 3L, }`),
    ).toEqual({
      a: [[1, -2500], "x'ε", true, false, null, []],
      b: {},
      c: 3,
    });
    for (const text of ['', '{', "{'a'}", '[1 2]', "'x", '1 + 1', 'f()', "'\\u12'", "'\\q'"]) {
      expect(() => parsePythonLiteral(text), text).toThrow(SyntaxError);
    }
  });
});

describe('NumPy files', () => {
  test('are told by their content whatever their name', async () => {
    const formatOf = async (name: string) => (await readerFor(fileOf(readFileSync(made(name)), '.dat'))).format;
    expect([await formatOf('table.npy'), await formatOf('columns.npz')]).toEqual(['npy', 'npz']);
  });

  test('are inspected column by column', async () => {
    for (const name of ['table.npy', 'columns.npz']) {
      const { rows, columns } = await inspectFile(made(name));
      expect(rows).toBe(ROWS);
      expect(columns.map((column) => column.name)).toEqual([...numbers.slice(0, 8), 'run', 'half', 'name']);
      expect(columns[1]).toMatchObject({ type: 'number', missing: 100, least: 0, greatest: 999 / 8 });
      expect(columns[8].labels).toEqual(['run 0', 'run 1', 'run 2', 'run 3']);
    }
  });
});
