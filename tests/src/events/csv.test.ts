import fc from 'fast-check';
import { readFileSync } from 'node:fs';
import { gzipSync } from 'node:zlib';
import { describe, expect, test } from 'vitest';
import { BATCH_ROWS } from '../../../src/events/batch-builder';
import { csv } from '../../../src/events/csv';
import { LEAST_PIECE } from '../../../src/events/line-units';
import { LONGEST_LINE } from '../../../src/events/lines';
import { InputError } from '../../../src/study/input-error';
import { fileOf, gather, needsOf, readAll, type Gathered } from './gather';

const two = needsOf('t', 'r');

async function read(text: string | Uint8Array, ...columns: string[]): Promise<Gathered> {
  return readAll(csv, fileOf(text), columns.length === 0 ? two : needsOf(...columns));
}

async function failure(work: Promise<unknown>): Promise<InputError> {
  const error = await work.then(
    () => null,
    (cause: unknown) => cause,
  );
  expect(error).toBeInstanceOf(InputError);
  return error as InputError;
}

describe('a table with a header', () => {
  test('gives one row a line, its place the physical line, the header being the first', async () => {
    const { rows, rejects, placesPassed } = await read('t,r\n1,2\n3.5,-4e1\n');
    expect(rows).toEqual([
      [2, 1, 2],
      [3, 3.5, -40],
    ]);
    expect(rejects).toEqual([]);
    expect(placesPassed).toBe(3);
  });

  test('may use comma, tab, semicolon or bar', async () => {
    for (const sign of [',', '\t', ';', '|']) {
      const { rows } = await read(`t${sign}x${sign}r\n1${sign}9${sign}2\n`);
      expect(rows).toEqual([[2, 1, 2]]);
    }
  });

  test('keeps a decimal comma apart from a semicolon, and rejects it as no number', async () => {
    const { rejects } = await read('t;r\n1,5;2\n');
    expect(rejects).toEqual([{ place: 2, column: 't', value: '1,5', reason: 'not a number' }]);
  });

  test('may end its lines with a carriage return too, begin with a byte order mark, and lack a last line end', async () => {
    const { rows, placesPassed } = await read('\uFEFFt,r\r\n1,2\r\n3,4');
    expect(rows).toEqual([
      [2, 1, 2],
      [3, 3, 4],
    ]);
    expect(placesPassed).toBe(3);
  });

  test('hands on the needed columns in the order of the needs, one of them twice where it is needed twice', async () => {
    const { rows } = await read('a,b,c\n1,x,3\n', 'c', 'b:text', 'c:text', 'a');
    expect(rows).toEqual([[2, 3, 'x', '3', 1]]);
  });

  test('has blanks around its fields set aside, in names and in values', async () => {
    const { rows } = await read(' t , r ,run\n 1 ,\t2, x y \n 3,4 ,\n', 't', 'r', 'run:text');
    expect(rows).toEqual([
      [2, 1, 2, 'x y'],
      [3, 3, 4, null],
    ]);
  });

  test('has blank lines passed over, yet counted as places', async () => {
    const { rows, rejects, placesPassed } = await read('\nt,r\n\n1,2\r\n\r\n   \n3,4\n\n');
    expect(rows).toEqual([
      [4, 1, 2],
      [7, 3, 4],
    ]);
    expect(rejects).toEqual([]);
    expect(placesPassed).toBe(8);
  });

  test('of one column has blank lines passed over as well', async () => {
    const { rows } = await read('t\n1\n\n  \n \r\n2\n', 't');
    expect(rows).toEqual([
      [2, 1],
      [6, 2],
    ]);
  });

  test('of one column has a row where nothing stands in quotes: that is a missing value', async () => {
    const { rows } = await read('t\n""\n\n"" \n" "\n', 't');
    expect(rows.map(([place]) => place)).toEqual([2, 4, 5]);
  });

  test('takes NULL, NaN and nothing as missing, in numbers, labels and identities alike', async () => {
    const { rows, rejects } = await read('t,run,id\nNULL,null,nan\nNaN,,\n,nan,NULL\n', 't', 'run:text', 'id:identity');
    expect(rejects).toEqual([]);
    expect(rows).toEqual([
      [2, NaN, null, null],
      [3, NaN, null, null],
      [4, NaN, null, null],
    ]);
  });

  test('without rows gives none', async () => {
    for (const text of ['t,r', 't,r\n', 't,r\n\n']) expect((await read(text)).rows).toEqual([]);
  });
});

describe('a line that is no row is rejected alone, with its place', () => {
  test('for a value that is no number', async () => {
    const { rows, rejects } = await read('t,r\n1,2\nabc,2\n1,0x10\n3,4\n');
    expect(rows.map(([place]) => place)).toEqual([2, 5]);
    expect(rejects).toEqual([
      { place: 3, column: 't', value: 'abc', reason: 'not a number' },
      { place: 4, column: 'r', value: '0x10', reason: 'not a number' },
    ]);
  });

  test('but a bad value in a column that nobody needs rejects nothing', async () => {
    expect((await read('t,x,r\n1,abc,2\n')).rejects).toEqual([]);
  });

  test('for too few or too many fields, empty ones among them', async () => {
    const { rows, rejects } = await read('t,x,r\n1,2\n1,2,3,\n1,2,3\n,,,,\n');
    expect(rows).toEqual([[4, 1, 3]]);
    expect(rejects).toEqual([
      { place: 2, column: null, value: '2 found, 3 expected', reason: 'too few fields' },
      { place: 3, column: null, value: '4 found, 3 expected', reason: 'too many fields' },
      { place: 5, column: null, value: '5 found, 3 expected', reason: 'too many fields' },
    ]);
  });

  test('for a quote that is not closed on its line, whatever stands on the lines behind', async () => {
    const { rows, rejects } = await read('t,r\n1,2\n"3,4\n5,6\n7,"8\n9,"1"0\n11,12\n');
    expect(rows.map(([place]) => place)).toEqual([2, 4, 7]);
    expect(rejects).toEqual([
      { place: 3, column: 't', value: '"3,4', reason: 'quote not closed' },
      { place: 5, column: 'r', value: '7,"8', reason: 'quote not closed' },
      { place: 6, column: 'r', value: '9,"1"0', reason: 'quote not closed' },
    ]);
  });

  test('for more than a mebibyte, and the line is not kept in memory', async () => {
    const longest = `1,${'0'.repeat(LONGEST_LINE - 2)}`;
    const { rows, rejects, placesPassed } = await read(`t,r\n${longest}\n${longest}0\n5,6\n7,${'0'.repeat(5e6)}\n8,9`);
    expect(rows.map(([place, t, r]) => [place, t, r])).toEqual([
      [2, 1, 0],
      [4, 5, 6],
      [6, 8, 9],
    ]);
    expect(rejects.map(({ place, reason }) => [place, reason])).toEqual([
      [3, 'line too long'],
      [5, 'line too long'],
    ]);
    expect(placesPassed).toBe(6);
  });

  test('and its value is shortened', async () => {
    const { rejects } = await read(`t,r\n${'x'.repeat(500)},1\n`);
    expect(rejects[0].value!.length).toBeLessThan(100);
  });
});

describe('quotes', () => {
  test('hold delimiters, and doubled ones stand for one', async () => {
    const { rows } = await read('"t",r,"run"\n"1",2,"a,""b"""\n3, "4" ,""\n', 't', 'r', 'run:text');
    expect(rows).toEqual([
      [2, 1, 2, 'a,"b"'],
      [3, 3, 4, null],
    ]);
  });

  test('inside a field that does not begin with one are plain characters', async () => {
    const { rows } = await read('t,run\n1,5"\n', 't', 'run:text');
    expect(rows).toEqual([[2, 1, '5"']]);
  });
});

describe('labels', () => {
  test('are the same label however they are written: quoted or not, in UTF-8 or Latin-1', async () => {
    const text = Buffer.concat([Buffer.from('t,run\n1,é\n2,"é"\n3,'), Buffer.from([0xe9]), Buffer.from('\n4,b\n')]);
    const path = fileOf(text);
    const needs = needsOf('run:text');
    const units = await csv.plan(path, 'events', needs, 1);
    for await (const { columns } of csv.read(units[0], needs)) {
      const [column] = columns;
      expect(column).toEqual({ as: 'text', codes: Int32Array.of(0, 0, 0, 1), labels: ['é', 'b'] });
    }
  });

  test('number thousands and stay exact', async () => {
    const labels = Array.from({ length: 5000 }, (_, i) => `run-${(i * 7919) % 5000}`);
    const { rows } = await read(`t,run\n${labels.map((label, i) => `${i},${label}`).join('\n')}`, 'run:text');
    expect(rows.map(([, label]) => label)).toEqual(labels);
  });
});

describe('a line', () => {
  test('is read alike whether it looks plain or not: a doubled quote at its end changes nothing before it', async () => {
    const field = fc.oneof(
      fc.constantFrom(
        '',
        '1',
        '-2.5',
        ' 3',
        '4 ',
        '\t5\t',
        '"6"',
        '" 7 "',
        '"a,b"',
        'a b',
        '1e5',
        '+7',
        'nan',
        '""',
        'x',
        '0x1',
        '12345678901',
      ),
      fc.double().map(String),
      fc.integer().map((n) => `"${n}"`),
    );
    const lines = fc.array(fc.array(field, { minLength: 2, maxLength: 4 }), { minLength: 1, maxLength: 8 });
    const columns = ['t', 't:text', 'r', 'id:text', 'id:identity'];
    await fc.assert(
      fc.asyncProperty(lines, async (rows) => {
        const plain = await read(['t,r,id', '1,1,1', ...rows.map((each) => each.join(','))].join('\n'), ...columns);
        const odd = await read(
          ['t,r,id,z', '1,1,1,z', ...rows.map((each) => `${each.join(',')},"q""q"`)].join('\n'),
          ...columns,
        );
        const rejects = (all: Gathered) => all.rejects.map(({ place, column, reason }) => [place, column, reason]);
        expect(odd.rows).toEqual(plain.rows);
        expect(rejects(odd)).toEqual(rejects(plain));
      }),
      { numRuns: 500, seed: 7 },
    );
  });

  test('that is rejected leaves no label behind', async () => {
    const text = 't,run\n1,a\nx,b\n2,c,d\n3,"e\n4,f\n';
    const needs = needsOf('run:text', 't');
    const [unit] = await csv.plan(fileOf(text), 'events', needs, 1);
    for await (const { columns } of csv.read(unit, needs)) expect(columns[0]).toMatchObject({ labels: ['a', 'f'] });
  });
});

/** Lines of every sort, good and bad, and how they end. */
const line = fc.oneof(
  { weight: 6, arbitrary: fc.tuple(fc.integer(), fc.double(), fc.constantFrom('a', 'b', 'é')).map((v) => v.join(',')) },
  fc.constantFrom(
    '',
    ' ',
    '1,2',
    '1,2,c,d',
    '"1",2,"x,y"',
    '"1,2,c',
    '1,"2,c',
    'x,1,a',
    'nan,,',
    ',,',
    '1,2,"a""b"',
    '"',
  ),
  fc.string({ maxLength: 12 }).map((text) => text.replace(/[\n\r\0]/g, '')),
);
const table = fc
  .tuple(fc.array(line, { maxLength: 30 }), fc.constantFrom('\n', '\r\n'), fc.boolean())
  .map(([lines, end, open]) => `t,r,run${end}${lines.join(end)}${open || lines.length === 0 ? '' : end}`);

describe('a file cut into ranges', () => {
  test('gives the same rows, rejects and line numbers wherever it is cut', async () => {
    const needs = needsOf('t', 'r', 'run:text', 't:identity');
    const cuts = fc.array(fc.double({ min: 0, max: 1, noNaN: true }), { maxLength: 5 });
    await fc.assert(
      fc.asyncProperty(table, cuts, async (text, shares) => {
        const path = fileOf(text);
        const [whole] = await csv.plan(path, 'events', needs, 1);
        const edges = [0, ...shares.map((share) => Math.floor(share * whole.end)).sort((a, b) => a - b), whole.end];
        const units = edges.slice(1).map((end, i) => ({ ...whole, start: edges[i], end }));
        const pieces = await gather(csv, units, needs);
        const one = await gather(csv, [whole], needs);
        expect({ ...pieces, batches: 0 }).toEqual({ ...one, batches: 0 });
        expect(one.bytes).toBe(whole.end);
      }),
      { numRuns: 300, seed: 3 },
    );
  });

  test('accounts for every line: header, rows, rejects and blank lines are all there is', async () => {
    await fc.assert(
      fc.asyncProperty(table, async (text) => {
        const { rows, rejects, placesPassed } = await read(text);
        const lines = text.replace(/\r?\n$/, '').split('\n');
        const blank = lines.slice(1).filter((each) => /^[ \t]*\r?$/.test(each)).length;
        const places = [...rows.map(([place]) => place), ...rejects.map(({ place }) => place)];
        expect(new Set(places).size).toBe(places.length);
        expect(placesPassed - 1 - places.length).toBeGreaterThanOrEqual(0);
        expect(rows.length + rejects.length + blank + 1).toBe(lines.length);
      }),
      { numRuns: 300, seed: 4 },
    );
  });

  test('is planned in pieces of at least four mebibytes, and each line belongs to one', async () => {
    const row = '12.5,13.25\n';
    const count = Math.ceil((2.5 * LEAST_PIECE) / row.length);
    const path = fileOf(`t,r\n${row.repeat(count)}`);
    const units = await csv.plan(path, 'events', two, 8);
    expect(units.length).toBe(2);
    const { rows, placesPassed, batches } = await gather(csv, units, two);
    expect(rows.length).toBe(count);
    expect(rows.every(([place], i) => place === i + 2)).toBe(true);
    expect(placesPassed).toBe(count + 1);
    expect(batches).toBeGreaterThanOrEqual(count / BATCH_ROWS);
  });

  test('has as many rejects in a batch as rows at most', async () => {
    const path = fileOf(`t,r\n${'x,y\n'.repeat(3 * BATCH_ROWS)}`);
    const [unit] = await csv.plan(path, 'events', two, 1);
    let rejected = 0;
    for await (const { rejects } of csv.read(unit, two)) {
      expect(rejects.length).toBeLessThanOrEqual(BATCH_ROWS);
      rejected += rejects.length;
    }
    expect(rejected).toBe(3 * BATCH_ROWS);
  });
});

describe('a file that cannot be read as a table is refused in one line', () => {
  const message = async (content: string | Uint8Array, ...columns: string[]) =>
    (await failure(read(content, ...columns))).message;

  test('when it is empty', async () => {
    for (const text of ['', '\n\n', '\uFEFF', ' \n']) expect(await message(text)).toMatch(/^events: an empty file: /);
  });

  test('when a needed column is absent, naming those there are', async () => {
    expect(await message('t,x\n1,2\n')).toBe('events: no column "r": the columns are t, x');
  });

  test('when the name of a needed column stands twice', async () => {
    expect(await message('t,r,t\n1,2,3\n')).toBe(
      'events: two columns are named "t", number 1 and number 3: rename one of them',
    );
    expect((await read('t,r,x,x\n1,2,3,4\n')).rows).toEqual([[2, 1, 2]]);
  });

  test('when there is no header', async () => {
    expect(await message('1.5,2\n3,4\n')).toMatch(/the first line reads 1.5, 2, so there is no header/);
  });

  test('when it seems to be separated by something else', async () => {
    expect(await message('t r\n1 2\n3 4\n')).toMatch(/one column; 2 seem to be separated by blanks/);
    expect(await message('t:r\n1:2\n')).toMatch(/one column; 2 seem to be separated by colons/);
    expect(await message('t r\n1,2\n3,4\n')).toMatch(/one column, the lines as 2 separated by commas/);
    expect(await message('t,r\n1;2\n3;4\n')).toMatch(/header is separated by commas, the lines by semicolons/);
  });

  test('when it is binary, wherever its first NUL byte stands', async () => {
    expect(await message(Buffer.from([0x7f, 0x45, 0x4c, 0x46, 0, 1, 2, 3]))).toMatch(
      /not a text table: a NUL byte at byte 4/,
    );
    const late = Buffer.from(`t,r\n${'1,2\n'.repeat(300_000)}1,\0\n`);
    expect(await message(late)).toMatch(new RegExp(`a NUL byte at byte ${late.length - 2}:`));
    expect(await message(Buffer.from('t,r\n1,2\n', 'utf16le'))).toMatch(/not a text table/);
  });

  test('when it has no line end for a mebibyte', async () => {
    expect(await message('x'.repeat(LONGEST_LINE + 2))).toMatch(/not a text table/);
  });

  test('when a quote in its header is not closed', async () => {
    expect(await message('"t,r\n1,2\n')).toMatch(/^events:1: a quote in the header is not closed/);
  });

  test('when it is absent or a folder', async () => {
    expect((await failure(csv.plan('/nowhere/x.csv', 'x.csv', two, 1))).message).toMatch(
      /^x.csv: cannot be read \(ENOENT\)/,
    );
    expect((await failure(csv.plan('/', 'root', two, 1))).message).toMatch(/^root: is no file/);
  });
});

describe('columns of a table', () => {
  test('are told with types by its first lines', async () => {
    const path = fileOf('a,b,c,d\n1,x,,\n2,3,NaN,inf\n');
    expect(await csv.columns(path)).toEqual([
      { name: 'a', type: 'number' },
      { name: 'b', type: 'text' },
      { name: 'c', type: 'unknown' },
      { name: 'd', type: 'number' },
    ]);
  });
});

describe('gzip', () => {
  const text = `t,r\n${Array.from({ length: 40_000 }, (_, i) => `${i}.25,${(i * 7919) % 1009}`).join('\n')}\n`;

  test('is told by content, and gives what the plain file gives', async () => {
    const plain = await read(text);
    const packed = gzipSync(text);
    const zipped = await readAll(csv, fileOf(packed, '.txt'), two, 4);
    expect(zipped.rows).toEqual(plain.rows);
    expect(zipped.bytes).toBe(packed.length);
  });

  test('may have several members, cut anywhere, and padding of zeros', async () => {
    const parts = [text.slice(0, 1001), text.slice(1001, 1001), text.slice(1001)].map((part) => gzipSync(part));
    const { rows } = await read(Buffer.concat([...parts, Buffer.alloc(512)]));
    expect(rows.length).toBe(40_000);
  });

  test('that breaks off stops with the place', async () => {
    const packed = gzipSync(text);
    for (const length of [packed.length - 1, packed.length - 9, Math.floor(packed.length / 2), 15]) {
      const error = await failure(read(packed.subarray(0, length)));
      expect(error.message).toBe(
        `events: truncated: the gzip data break off at byte ${length}: copy or make the file again`,
      );
    }
  });

  test('that is damaged stops, whichever bit is turned', async () => {
    const packed = gzipSync(text);
    for (let i = 0; i < 40; i++) {
      const bad = Buffer.from(packed);
      // From the first byte behind the header, whose time stamp and name nothing checks.
      bad[10 + Math.floor((i * (packed.length - 10)) / 40)] ^= 1 << (i % 8);
      expect((await failure(read(bad))).message).toMatch(/^events: .*(damaged|truncated|gzip).* at .*byte \d+/);
    }
  });

  test('followed by anything else stops with the place, for rows may be lost there', async () => {
    const packed = gzipSync(text);
    const more = await failure(read(Buffer.concat([packed, Buffer.from('more')])));
    expect(more.message).toMatch(/^events: damaged gzip data at or soon after byte \d+ /);
    const hidden = await failure(read(Buffer.concat([packed, Buffer.alloc(3), packed])));
    expect(hidden.message).toMatch(`the gzip data end at byte ${packed.length}, others follow`);
  });
});

describe('cancelling', () => {
  test('ends the reading between two batches', async () => {
    const path = fileOf(`t,r\n${'1,2\n'.repeat(5 * BATCH_ROWS)}`);
    const [unit] = await csv.plan(path, 'events', two, 1);
    const stop = new AbortController();
    setTimeout(() => stop.abort(), 0);
    const reading = (async () => {
      for await (const { rows } of csv.read(unit, two, stop.signal)) expect(rows).toBeGreaterThan(0);
    })();
    await expect(reading).rejects.toThrow('cancelled');
    expect(readFileSync(path).length).toBe(unit.end);
  });
});
