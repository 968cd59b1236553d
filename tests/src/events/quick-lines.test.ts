import fc from 'fast-check';
import { afterEach, describe, expect, test, vi } from 'vitest';
import type { Reader } from '../../../src/events/batch';
import { csv } from '../../../src/events/csv';
import { fileOf, needsOf, readAll, type Gathered } from './gather';

const bits = (values: number[]): BigUint64Array => new BigUint64Array(Float64Array.from(values).buffer);

/** What `work` gives with the reader of a system that grants no WebAssembly memory: every line goes the careful way. */
async function refused<T>(work: (reader: Reader) => Promise<T>): Promise<T> {
  vi.resetModules();
  const denied = vi.spyOn(WebAssembly, 'Memory').mockImplementation(function () {
    throw new RangeError('WebAssembly.Memory(): could not allocate memory');
  });
  const { csv: fresh } = await import('../../../src/events/csv');
  const result = await work(fresh);
  expect(denied).toHaveBeenCalled();
  denied.mockRestore();
  return result;
}

const carefully = (text: string, columns: string[]): Promise<Gathered> =>
  refused((reader) => readAll(reader, fileOf(text), needsOf(...columns)));

afterEach(() => vi.restoreAllMocks());

/** Texts of a field that are not just a short number. */
const special: string[] = [
  '',
  '""',
  '" 7 "',
  ' 8',
  '9 ',
  '\t1\t',
  '+1',
  '1e5',
  'nan',
  'NULL',
  '-',
  '.',
  '-.',
  '1.',
  '.5',
  '-.5',
  '1.2.3',
  '1-1',
  'x',
  '12x',
  '"a,b"',
  '"a""b"',
  'a"b',
  '"a"b',
  '"a" ',
  '"',
  '""b',
  'é',
  'inf',
  '12345678901234567890',
  '0x1',
  '1:',
  '1/',
  'e+01',
  '.e+01',
  '-e+01',
  '1.e+01',
  '.5e-01',
  '1e+1',
  '1e+0x',
  '1.5e+01x',
  '1.5ee+01',
  '1.2.3e+04',
  '1e+23',
  '1e-23',
  '9e+22',
  '123456789.',
  '.123456789',
  '-12345678.9',
  '1234567890.12345678.9',
  '12345678-',
  '1234567:9',
  '0.00000000000000012345678901',
  '1.5e+:1',
  '1.5e+/1',
  '1.5e+1:',
  '1.25e*01',
  '1.25e.01',
  '12345678e101',
];
/** Fields that a table may hold, most of them plain numbers. */
const field = fc.oneof(
  { weight: 4, arbitrary: fc.integer({ min: -99999, max: 99999 }).map((n) => String(n / 100)) },
  { weight: 2, arbitrary: fc.double().map(String) },
  { weight: 1, arbitrary: fc.integer().map((n) => `"${n}"`) },
  { weight: 4, arbitrary: fc.constantFrom(...special) },
  { weight: 1, arbitrary: fc.string({ maxLength: 30 }).map((text) => text.replace(/[\n\0]/g, '')) },
);
/** Runs of usual lines, and between them lines of any sort: the quick way is entered and left many times. */
const usual = fc.integer({ min: 1, max: 60 }).chain((length) =>
  fc.array(
    fc
      .tuple(fc.double({ min: -1e3, max: 1e3, noNaN: true }), fc.nat(), fc.constantFrom('a', '"b"', ''))
      .map((row) => row.join()),
    { minLength: length, maxLength: length },
  ),
);
const odd = fc.array(field, { minLength: 1, maxLength: 4 }).map((row) => [row.join()]);
const table = fc
  .tuple(fc.array(fc.oneof(usual, odd), { minLength: 1, maxLength: 12 }), fc.constantFrom('\n', '\r\n'))
  .map(([runs, end]) => ['t,r,id', ...runs.flat()].join(end));

describe('the quick way through a table gives what the careful way gives', () => {
  test('with every unusual text in every column, and usual lines around it', async () => {
    const lines = special.flatMap((text) =>
      ['1.5,2.5,a', `${text},2,b`, `1,${text},c`, `1,2,${text}`].flatMap((each) => [
        each,
        ...Array<string>(20).fill('3,4,d'),
      ]),
    );
    const text = ['t,r,id', ...lines].join('\n');
    for (const columns of [['t', 'r'], ['t', 'r', 'id:text', 'id:identity'], ['t', 't:text', 'id'], ['id:text']]) {
      expect(await readAll(csv, fileOf(text), needsOf(...columns))).toEqual(await carefully(text, columns));
    }
  });

  test('row by row, reject by reject, for lines of any sort', async () => {
    const columns = ['r', 't', 'id:text', 't:text', 'id:identity'];
    await fc.assert(
      fc.asyncProperty(table, async (text) => {
        expect(await readAll(csv, fileOf(text), needsOf(...columns))).toEqual(await carefully(text, columns));
      }),
      { numRuns: 250, seed: 11 },
    );
  });

  test('where a column is skipped that holds whatever a text may hold', async () => {
    await fc.assert(
      fc.asyncProperty(table, async (text) => {
        expect(await readAll(csv, fileOf(text), needsOf('t'))).toEqual(await carefully(text, ['t']));
      }),
      { numRuns: 150, seed: 12 },
    );
  });

  test('to whoever inspects it: the same facts of every column', async () => {
    const large = (text: string): string =>
      `${text}\n${Array.from({ length: 1500 }, (_, i) => `${i / 3},${i % 5},a`).join('\n')}\n`;
    await fc.assert(
      fc.asyncProperty(table, table, async (before, after) => {
        const path = fileOf(large(before) + after.slice(after.indexOf('\n') + 1));
        const facts = await csv.inspect!(path);
        expect(facts).toEqual(await refused((reader) => reader.inspect!(path)));
        expect(facts.rows).toBeGreaterThanOrEqual(1500);
      }),
      { numRuns: 60, seed: 14 },
    );
  });

  test('in a table of one column, blank lines in it', async () => {
    const line = fc.oneof({ weight: 5, arbitrary: field }, fc.constantFrom('', ' ', '  ', '1 '));
    await fc.assert(
      fc.asyncProperty(fc.array(line, { maxLength: 80 }), async (lines) => {
        const text = ['t', ...lines.map((each) => each.replaceAll(/[,;|\t]/g, ''))].join('\n');
        expect(await readAll(csv, fileOf(text), needsOf('t'))).toEqual(await carefully(text, ['t']));
      }),
      { numRuns: 150, seed: 13 },
    );
  });

  test('where one column in thousands is needed, and lines are longer than what is looked at in one go', async () => {
    const header = Array.from({ length: 3000 }, (_, i) => `c${i}`);
    const row = (i: number) => header.map((_, k) => (k === 2999 ? i / 8 : 'x'.repeat((i * k) % 60))).join();
    const text = [header.join(), ...Array.from({ length: 40 }, (_, i) => row(i))].join('\n');
    const quick = await readAll(csv, fileOf(text), needsOf('c2999', 'c0:text'));
    expect(quick.rows.map(([, value]) => value)).toEqual(Array.from({ length: 40 }, (_, i) => i / 8));
    expect(quick).toEqual(await carefully(text, ['c2999', 'c0:text']));
  });
});

describe('a number read the quick way is the nearest double', () => {
  const digits = (least: number, most: number) =>
    fc.array(fc.constantFrom(...'0123456789'), { minLength: least, maxLength: most }).map((list) => list.join(''));
  const sign = fc.constantFrom('', '-');

  /** The check from outside: the `Number` of the language, correctly rounded by ECMA-262 (StringToNumber). */
  async function asNumberReads(texts: string[]): Promise<void> {
    const { rows, rejects } = await readAll(
      csv,
      fileOf(`t,r\n${texts.map((text) => `${text},1`).join('\n')}\n`),
      needsOf('t'),
    );
    expect(rejects).toEqual([]);
    const values = rows.map(([, value]) => value as number);
    const wrong = bits(values).findIndex((value, i) => value !== bits([Number(texts[i])])[0]);
    expect(wrong === -1 ? '' : `${texts[wrong]} read as ${values[wrong]}`).toBe('');
    expect(rows.length).toBe(texts.length);
  }

  test('of 1 to 25 digits with the point anywhere and any exponent, bit for bit as Number reads it', async () => {
    const body = fc.oneof(
      digits(1, 25),
      fc.tuple(digits(1, 10), digits(0, 10)).map(([a, b]) => `${a}.${b}`),
      fc.tuple(digits(0, 3), digits(1, 24)).map(([a, b]) => `${a}.${b}`),
      fc.tuple(fc.integer({ min: 0, max: 8 }), digits(14, 18)).map(([zeros, b]) => `0.${'0'.repeat(zeros)}${b}`),
    );
    const exponent = fc.oneof(
      { weight: 2, arbitrary: fc.constant('') },
      fc
        .tuple(fc.constantFrom('e+', 'e-', 'E+', 'E-', 'e'), fc.integer({ min: 0, max: 40 }))
        .map(([e, n]) => `${e}${String(n).padStart(2, '0')}`),
      fc.constantFrom('e5', 'e-7', 'e+1', 'e+005', 'e-120'),
    );
    const number = fc.tuple(sign, body, exponent).map((parts) => parts.join(''));
    await asNumberReads(fc.sample(number, { numRuns: 200_000, seed: 21 }));
  });

  test('of every double as programs print it, with 6, 9, 15, 16 and 17 digits', async () => {
    const doubles = fc.sample(fc.double({ min: -1e6, max: 1e6, noNaN: true }), { numRuns: 10_000, seed: 22 });
    const random = Array.from({ length: 20_000 }, (_, i) => ((i * 0.6180339887498949) % 1) * 10 ** ((i % 9) - 4));
    const all = [...doubles, ...random];
    await asNumberReads([...all.map(String), ...[6, 9, 15, 16, 17].flatMap((p) => all.map((x) => x.toPrecision(p)))]);
    // As C prints them: an exponent has two digits at least.
    const asC = (x: number, p: number): string => x.toExponential(p).replace(/e([+-])(\d)$/, 'e$10$2');
    await asNumberReads([4, 8, 14, 15, 16].flatMap((p) => all.map((x) => asC(x, p))));
  });

  test('at halfway cases of 16 and 17 digits and on both sides of them', async () => {
    const around = (n: bigint) => [n - 1n, n, n + 1n].map(String);
    const whole = [2n ** 53n + 1n, 2n ** 53n + 3n, 2n ** 54n + 2n, 2n ** 55n + 4n, 2n ** 56n + 8n].flatMap(around);
    const scaled = whole.flatMap((text) => [1, 4, 8, 15].map((at) => `${text.slice(0, at)}.${text.slice(at)}`));
    // (2^53 + 1) / 2^k and its neighbours in the 17th digit, k = 1 to 4: their decimals are short.
    const fractions = ['4503599627370496.5', '2251799813685248.25', '1125899906842624.125', '562949953421312.0625'];
    const limits = [
      '9007199254740991',
      '9007199254740992',
      '999999999999999999',
      '1000000000000000000',
      '1000000000000000001',
    ];
    await asNumberReads([...whole, ...scaled, ...fractions, ...limits, ...limits.map((text) => `0.0000${text}`)]);
  });
});
