import {
  Bool,
  compressionRegistry,
  CompressionType,
  Decimal,
  Dictionary,
  Float16,
  Float32,
  Float64,
  Int16,
  Int32,
  Int64,
  RecordBatchFileWriter,
  RecordBatchStreamWriter,
  Table,
  tableFromArrays,
  Uint64,
  Uint8,
  Utf8,
  vectorFromArray,
  type DataType,
} from 'apache-arrow';
import { readFileSync } from 'node:fs';
import { createRequire } from 'node:module';
import { join } from 'node:path';
import { describe, expect, test } from 'vitest';
import { arrow } from '../../../src/events/arrow';
import { readerFor } from '../../../src/events/formats';
import { inspectFile } from '../../../src/events/inspect';
import { fileOf, needsOf, readAll, refusal } from './gather';
import { made } from './reference-rows';

/** Both forms of the format, in batches of 7 rows. */
function written(table: Table, options = {}): { file: Uint8Array; stream: Uint8Array } {
  const pieces = Array.from({ length: Math.ceil(table.numRows / 7) }, (_, i) => table.slice(7 * i, 7 * i + 7));
  const bytes = (writer: RecordBatchFileWriter | RecordBatchStreamWriter) => {
    for (const piece of pieces) for (const batch of piece.batches) writer.write(batch);
    return writer.finish().toUint8Array(true);
  };
  return { file: bytes(new RecordBatchFileWriter(options)), stream: bytes(new RecordBatchStreamWriter(options)) };
}

const ROWS = 50;
const index = Array.from({ length: ROWS }, (_, i) => i);
const column = <T extends DataType>(of: (i: number) => unknown, type: T) =>
  vectorFromArray(index.map((i) => (i % 9 === 4 ? null : of(i))) as never[], type);

const table = new Table({
  d: column((i) => i / 4, new Float64()),
  f: column((i) => i / 8, new Float32()),
  h: column((i) => i / 2, new Float16()),
  i: column((i) => i - 20, new Int16()),
  u: column((i) => i, new Uint8()),
  w: column((i) => -i, new Int32()),
  long: column((i) => 2n ** 53n + BigInt(i), new Int64()),
  unsigned: column((i) => BigInt(i), new Uint64()),
  flag: column((i) => i % 2 === 0, new Bool()),
  run: column((i) => `é ${i % 3}`, new Utf8()),
  tag: column((i) => `tag ${i % 2}`, new Dictionary(new Utf8(), new Int32())),
});

const values: Record<string, (i: number) => number> = {
  d: (i) => i / 4,
  f: (i) => i / 8,
  h: (i) => i / 2,
  i: (i) => i - 20,
  u: (i) => i,
  w: (i) => -i,
  long: (i) => Number(2n ** 53n + BigInt(i)),
  unsigned: (i) => i,
  flag: (i) => (i % 2 === 0 ? 1 : 0),
};

describe('an Arrow file, and an Arrow stream', () => {
  test('give numbers of any width as doubles, nulls as missing, over many batches', async () => {
    for (const bytes of Object.values(written(table))) {
      const {
        rows,
        rejects,
        placesPassed,
        bytes: told,
      } = await readAll(arrow, fileOf(bytes), needsOf(...Object.keys(values)));
      expect(rejects).toEqual([]);
      expect(rows).toEqual(
        index.map((i) => [i + 1, ...Object.values(values).map((of) => (i % 9 === 4 ? NaN : of(i) + 0))]),
      );
      expect(placesPassed).toBe(ROWS);
      expect(told).toBe(bytes.length);
    }
  });

  test('give labels of texts, dictionaries, booleans and integers, and identities as other formats do', async () => {
    const needs = needsOf('run:text', 'tag:text', 'flag:text', 'long:text', 'unsigned:identity', 'long:identity');
    const { rows } = await readAll(arrow, fileOf(written(table).stream), needs);
    const csv = fileOf(`a,b\n${index.map((i) => (i % 9 === 4 ? ',' : `${i},${2n ** 53n + BigInt(i)}`)).join('\n')}`);
    const same = await readAll(await readerFor(csv), csv, needsOf('a:identity', 'b:identity'));
    expect(rows).toEqual(
      index.map((i) => {
        if (i % 9 === 4) return [i + 1, null, null, null, null, null, null];
        const labels = [`é ${i % 3}`, `tag ${i % 2}`, String(i % 2 === 0), String(2n ** 53n + BigInt(i))];
        return [i + 1, ...labels, ...same.rows[i].slice(1)];
      }),
    );
  });

  test('give decimals as the nearest doubles', async () => {
    const words = [123456789, -1, 5].map((n) =>
      Uint32Array.from([0, 32, 64, 96], (s) => Number(BigInt.asUintN(32, BigInt(n) >> BigInt(s)))),
    );
    const decimals = new Table({ x: vectorFromArray([...words, null], new Decimal(3, 18, 128)) });
    const { rows } = await readAll(arrow, fileOf(written(decimals).file), needsOf('x'));
    expect(rows.map(([, x]) => x)).toEqual([123456.789, -0.001, 0.005, NaN]);
  });

  test('without rows give none', async () => {
    const empty = table.slice(0, 0);
    const writer = RecordBatchStreamWriter.writeAll(new Table(empty.schema, empty.batches));
    expect((await readAll(arrow, fileOf(writer.toUint8Array(true)), needsOf('d'))).rows).toEqual([]);
  });

  test('are told by their content whatever their name', async () => {
    for (const bytes of Object.values(written(table)))
      expect((await readerFor(fileOf(bytes, '.dat'))).format).toBe('arrow');
  });

  test('of an open data set agree with its JSON form (vega-datasets of the registry, flights-200k)', async () => {
    const folder = join(createRequire(import.meta.url).resolve('vega-datasets'), '../../data');
    const flights = JSON.parse(readFileSync(join(folder, 'flights-200k.json'), 'utf8')) as Record<string, number>[];
    const { rows } = await readAll(arrow, join(folder, 'flights-200k.arrow'), needsOf('delay', 'distance', 'time'));
    expect(rows.length).toBe(flights.length);
    const differing = rows.filter(([, ...row], i) => {
      const { delay, distance, time } = flights[i];
      return row[0] !== delay || row[1] !== distance || Math.abs((row[2] as number) - time) > 1e-4;
    });
    expect(differing).toEqual([]);
  });
});

/** A zstd frame of raw blocks (RFC 8878): what an encoder may always write. */
function rawFrame(data: Uint8Array): Uint8Array {
  const size = Buffer.alloc(4);
  size.writeUInt32LE(data.length);
  const block = Buffer.alloc(4);
  block.writeUInt32LE((data.length << 3) | 1);
  return Buffer.concat([Buffer.from([0x28, 0xb5, 0x2f, 0xfd, 0xa0]), size, block.subarray(0, 3), data]);
}

describe('compressed Arrow data', () => {
  test('are read where zstd compressed them, and stop at damage', async () => {
    compressionRegistry.set(CompressionType.ZSTD, { encode: rawFrame });
    const numbers = tableFromArrays({ x: Float64Array.from({ length: 400 }, (_, i) => i / 3) });
    const writer = RecordBatchStreamWriter.writeAll(numbers, { compressionType: CompressionType.ZSTD } as never);
    const bytes = writer.toUint8Array(true);
    const { rows } = await readAll(arrow, fileOf(bytes), needsOf('x'));
    expect(rows.map(([, x]) => x)).toEqual(Array.from({ length: 400 }, (_, i) => i / 3));
    const bad = Buffer.from(bytes);
    bad[bad.indexOf(Buffer.from([0x28, 0xb5, 0x2f, 0xfd])) + 1] = 0;
    expect(await refusal(readAll(arrow, fileOf(bad), needsOf('x')))).toMatch(/^InputError: events: damaged/);
  });

  test('are read where LZ4 compressed them, as in Feather files by default, and stop at damage', async () => {
    const path = made('lz4.feather');
    const { rows, rejects } = await readAll(arrow, path, needsOf('e_tag', 'quality', 'run:text'));
    expect(rejects).toEqual([]);
    expect(rows).toEqual(Array.from({ length: 20_000 }, (_, i) => [i + 1, i / 4, i % 3, `run ${i % 7}`]));
    const bad = readFileSync(path);
    const frame = bad.indexOf(Buffer.from([0x04, 0x22, 0x4d, 0x18]));
    // The token of the first block: no literals, so that its first match has nothing to refer to.
    bad[frame + 11] = 0;
    expect(await refusal(readAll(arrow, fileOf(bad, '.feather'), needsOf('e_tag')))).toMatch(
      /^InputError: events: damaged LZ4 data at byte \d+ of a buffer \(/,
    );
  });

  test('stop where a buffer holds less than its rows need, of any type', async () => {
    const table = tableFromArrays({
      x: Float64Array.from({ length: 400 }, (_, i) => i / 3),
      n: Int32Array.from({ length: 400 }, (_, i) => i),
      run: vectorFromArray(
        Array.from({ length: 400 }, (_, i) => `run ${i}`),
        new Utf8(),
      ) as never,
      flag: vectorFromArray(
        Array.from({ length: 400 }, (_, i) => i % 3 === 0),
        new Bool(),
      ) as never,
    });
    // Every buffer is cut off before it is compressed.
    compressionRegistry.set(CompressionType.ZSTD, { encode: (data) => rawFrame(data.subarray(0, 24)) });
    const writer = RecordBatchStreamWriter.writeAll(table, { compressionType: CompressionType.ZSTD } as never);
    const path = fileOf(writer.toUint8Array(true));
    for (const column of ['x', 'n', 'run:text', 'flag']) {
      expect(await refusal(readAll(arrow, path, needsOf(column))), column).toMatch(
        /^InputError: events: damaged .* \(a buffer is too short behind row 0\)/,
      );
    }
  });

  test('of Feather version 1 are refused clearly', async () => {
    expect(await refusal(readAll(arrow, fileOf('FEA1....', '.feather'), needsOf('x')))).toMatch(/Feather of version 1/);
  });
});

describe('an Arrow file that cannot serve is refused in one line', () => {
  test('when it breaks off, at any byte', async () => {
    for (const bytes of Object.values(written(table))) {
      for (let length = 1; length < bytes.length; length += 97) {
        const message = await refusal(readAll(arrow, fileOf(bytes.subarray(0, length), '.arrow'), needsOf('d')));
        expect(message, `${length} of ${bytes.length} bytes`).toMatch(
          /^InputError: events: (truncated: .* byte \d+|its stream was never ended|damaged)/,
        );
      }
    }
  });

  test('when it is empty or something else', async () => {
    for (const content of ['', 'no Arrow at all, but a text']) {
      expect(await refusal(readAll(arrow, fileOf(content, '.arrow'), needsOf('d')))).toMatch(
        /^InputError: events: (damaged|truncated|its stream)/,
      );
    }
  });

  test('when a message claims an absurd size, before memory is taken', async () => {
    const { stream } = written(table);
    const head = Buffer.from(stream);
    head.writeInt32LE(0x7fffffff, 4);
    expect(await refusal(readAll(arrow, fileOf(head), needsOf('d')))).toMatch(/a head of 2147483647 bytes/);
  });

  test('when a needed column is absent or of an unsuitable type', async () => {
    const dated = fileOf(RecordBatchStreamWriter.writeAll(tableFromArrays({ d: [new Date(0)] })).toUint8Array(true));
    expect(await refusal(arrow.plan(dated, 'events', needsOf('d'), 1))).toMatch(
      /column "d" holds .*: choose one of single numbers/,
    );
    expect(await refusal(arrow.plan(dated, 'events', needsOf('x'), 1))).toMatch(/no column "x": the columns are d/);
  });
});

describe('inspecting an Arrow file', () => {
  test('tells every column', async () => {
    const { rows, columns } = await inspectFile(fileOf(written(table).file, '.arrow'));
    expect(rows).toBe(ROWS);
    expect(columns.map(({ name, type, missing }) => [name, type, missing])).toEqual([
      ...Object.keys(values).map((name) => [name, 'number', 6]),
      ['run', 'text', 6],
      ['tag', 'text', 6],
    ]);
    expect(columns.at(-1)!.labels).toEqual(['tag 0', 'tag 1']);
  });
});
