import fc from 'fast-check';
import { gzipSync } from 'node:zlib';
import { describe, expect, test } from 'vitest';
import { readerFor } from '../../../src/events/formats';
import { inspectFile } from '../../../src/events/inspect';
import { ndjson } from '../../../src/events/ndjson';
import { fileOf, gather, needsOf, readAll, type Gathered, refusal } from './gather';

async function read(text: string | Uint8Array, ...columns: string[]): Promise<Gathered> {
  return readAll(ndjson, fileOf(text, '.ndjson'), needsOf(...columns));
}

describe('a file of one JSON object a line', () => {
  test('gives one row a line, keys in any order, absent and null ones as missing', async () => {
    const text = '{"t":1.5,"r":2}\r\n\n{"r":-4e1,"x":[1],"t":null}\n  {"t": 3 }\n{"t":"NaN","r":"7"}';
    const { rows, rejects, placesPassed } = await read(text, 't', 'r');
    expect(rows).toEqual([
      [1, 1.5, 2],
      [3, NaN, -40],
      [4, 3, NaN],
      [5, NaN, 7],
    ]);
    expect(rejects).toEqual([]);
    expect(placesPassed).toBe(5);
  });

  test('has every bad line rejected alone, with its physical line and why', async () => {
    const lines = ['{"t":1}', '{"t":', '', '[1,2]', '{"t":"x"}', '{"t":[1]}', '{"t":2}', '3', '{"t":NaN}'];
    const { rows, rejects } = await read(lines.join('\n'), 't');
    expect(rows).toEqual([
      [1, 1],
      [7, 2],
    ]);
    expect(rejects).toEqual([
      { place: 2, column: null, value: '{"t":', reason: 'not JSON' },
      { place: 4, column: null, value: '[1,2]', reason: 'not a JSON object' },
      { place: 5, column: 't', value: '"x"', reason: 'not a number' },
      { place: 6, column: 't', value: '[1]', reason: 'not a number' },
      { place: 8, column: null, value: '3', reason: 'not a JSON object' },
      { place: 9, column: null, value: '{"t":NaN}', reason: 'not JSON' },
    ]);
  });

  test('gives labels and identities of texts, numbers and booleans', async () => {
    const text = '{"a":"x","id":42}\n{"a":7,"id":"42"}\n{"a":true,"id":null}\n{"a":{},"id":1}\n{"a":null,"id":[1]}\n';
    const { rows, rejects } = await read(text, 'a:text', 'id:identity');
    expect(rows.map(([, label]) => label)).toEqual(['x', '7', 'true']);
    expect(rows[0][2]).toBe(rows[1][2]);
    expect(rows[2][2]).toBeNull();
    expect(rejects.map(({ place, column, reason }) => [place, column, reason])).toEqual([
      [4, 'a', 'not a single value'],
      [5, 'id', 'not a single value'],
    ]);
  });

  test('keeps integers apart that no double can', async () => {
    const ids = ['12345678901234567890', '12345678901234567891', '-9007199254740993', '-9007199254740992'];
    const { rows } = await read(ids.map((id) => `{"x":{"id":1},"id" : ${id}}`).join('\n'), 'id:text', 'id:identity');
    expect(rows.map(([, label]) => label)).toEqual(ids);
    const csv = fileOf(`id\n${ids.join('\n')}`);
    const same = await readAll(await readerFor(csv), csv, needsOf('id:identity'));
    expect(rows.map((row) => row[2])).toEqual(same.rows.map((row) => row[1]));
  });

  test('takes a key for a key, whatever its name', async () => {
    const { rows } = await read('{"__proto__":1,"toString":2}\n{"a":1}\n', '__proto__', 'toString');
    expect(rows).toEqual([
      [1, 1, 2],
      [2, NaN, NaN],
    ]);
  });

  test('gives the same rows, rejects and line numbers wherever it is cut', async () => {
    const value = fc.oneof(
      fc.double({ noNaN: true, noDefaultInfinity: true }),
      fc.constant(null),
      fc.string({ maxLength: 3 }),
    );
    const line = fc.oneof(
      { weight: 4, arbitrary: fc.record({ t: value, r: value }, { requiredKeys: [] }).map((v) => JSON.stringify(v)) },
      fc.constantFrom('', '{', '[]', '{"t":1}}'),
    );
    const cuts = fc.array(fc.double({ min: 0, max: 1, noNaN: true }), { maxLength: 4 });
    await fc.assert(
      fc.asyncProperty(fc.array(line, { maxLength: 20 }), cuts, async (lines, shares) => {
        const needs = needsOf('t', 'r:text');
        const [whole] = await ndjson.plan(fileOf(['{"t":1,"r":2}', ...lines].join('\n')), 'events', needs, 1);
        const edges = [0, ...shares.map((share) => Math.floor(share * whole.end)).sort((a, b) => a - b), whole.end];
        const units = edges.slice(1).map((end, i) => ({ ...whole, start: edges[i], end }));
        const [pieces, one] = [await gather(ndjson, units, needs), await gather(ndjson, [whole], needs)];
        expect({ ...pieces, batches: 0 }).toEqual({ ...one, batches: 0 });
        const blank = lines.slice(0, -1).filter((each) => each === '').length;
        expect(one.rows.length + one.rejects.length + blank).toBe(one.placesPassed);
      }),
      { numRuns: 150, seed: 6 },
    );
  });

  test('reads through gzip and stops at its damage', async () => {
    const packed = gzipSync('{"t":1}\n{"t":2}\n');
    const { rows } = await read(packed, 't');
    expect(rows.length).toBe(2);
    expect(await refusal(read(packed.subarray(0, packed.length - 3), 't'))).toMatch(
      /^InputError: events: truncated: .* byte \d+/,
    );
  });

  test('is told by its content where its name tells nothing', async () => {
    const formatOf = async (text: string | Uint8Array, ending: string) =>
      (await readerFor(fileOf(text, ending))).format;
    expect(await formatOf('\n {"t":1}\n', '.dat')).toBe('ndjson');
    expect(await formatOf(gzipSync('{"t":1}\n'), '.gz')).toBe('ndjson');
    expect(await formatOf('t,r\n', '.dat')).toBe('csv');
    expect(await formatOf('{t},r\n', '.csv')).toBe('csv');
  });
});

describe('a file without what is needed is refused in one line', () => {
  test('when no object has a needed key, naming those there are, however late one might come', async () => {
    expect(await refusal(read('{"t":1}\n{"x":1}\n', 't', 'r'))).toBe(
      'InputError: events: no object has a key "r": the keys are t, x',
    );
    const late = await read(`${'{"t":1}\n'.repeat(40_000)}{"r":2}\n`, 't', 'r');
    expect(late.rows.length).toBe(40_001);
  });

  test('when no line holds an object', async () => {
    for (const text of ['', '\n', '[\n{"t":1},\n', 't,r\n1,2\n']) {
      expect(await refusal(read(text, 't'))).toMatch(/^InputError: events: no line holds a JSON object/);
    }
  });

  test('when it has a key a row, before memory runs out', async () => {
    const text = Array.from({ length: 20_000 }, (_, i) => `{"k${i}":1}`).join('\n');
    expect(await refusal(read(text, 'x'))).toMatch(/more than 10000 different keys/);
  });
});

describe('inspecting such a file', () => {
  test('tells every key as a column', async () => {
    const text = '{"t":1,"a":"x"}\n{"t":"2.5","a":null}\n{"t":true,"b":[1]}\n{"t":NaN}\n{"t":null,"a":"y"}\n';
    const { rows, rejected, columns } = await inspectFile(fileOf(text, '.jsonl'));
    expect([rows, rejected]).toEqual([4, 1]);
    expect(columns).toEqual([
      { name: 't', type: 'number', missing: 1, malformed: 0, nonFinite: 0, least: 1, greatest: 2.5, labels: null },
      {
        name: 'a',
        type: 'text',
        missing: 2,
        malformed: 0,
        nonFinite: 0,
        least: null,
        greatest: null,
        labels: ['x', 'y'],
      },
      { name: 'b', type: 'text', missing: 3, malformed: 0, nonFinite: 0, least: null, greatest: null, labels: null },
    ]);
  });
});
