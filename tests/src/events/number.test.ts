import fc from 'fast-check';
import { describe, expect, test } from 'vitest';
import { isMissing, parseNumber } from '../../../src/events/number';

const bytesOf = (text: string): Uint8Array => new TextEncoder().encode(text);
const parse = (text: string): number => parseNumber(bytesOf(text), 0, bytesOf(text).length);
const missing = (text: string): boolean => isMissing(bytesOf(text), 0, bytesOf(text).length);
const bits = (value: number): bigint => new BigUint64Array(Float64Array.of(value).buffer)[0];

/** The check from outside: the `Number` of the language, correctly rounded by ECMA-262 (StringToNumber). */
function sameBits(text: string): void {
  expect(bits(parse(text)), text).toBe(bits(Number(text)));
}

const digits = (least: number, most: number) =>
  fc.array(fc.constantFrom(...'0123456789'), { minLength: least, maxLength: most }).map((list) => list.join(''));

describe('a decimal field becomes the nearest double', () => {
  test('for any sign, digits, point and exponent, bit for bit as Number reads it', () => {
    const sign = fc.constantFrom('', '-', '+');
    const exponent = fc.oneof(
      fc.constant(''),
      fc.integer({ min: -45, max: 45 }).map((e) => `e${e}`),
      fc.integer({ min: -400, max: 400 }).map((e) => `E${e < 0 ? '' : '+'}${e}`),
    );
    const body = fc.oneof(
      digits(1, 25),
      fc.tuple(digits(1, 12), digits(0, 25)).map(([a, b]) => `${a}.${b}`),
      digits(1, 25).map((b) => `.${b}`),
    );
    fc.assert(
      fc.property(sign, body, exponent, (s, b, e) => sameBits(s + b + e)),
      { numRuns: 30_000, seed: 1 },
    );
  });

  test('for every double as programs print it in full, with 15, 16 and 17 digits', () => {
    fc.assert(
      fc.property(fc.double({ noNaN: true, noDefaultInfinity: true }), fc.integer({ min: -20, max: 20 }), (x, k) => {
        for (const value of [x, (x === 0 ? 1 : x / 10 ** Math.floor(Math.log10(Math.abs(x)))) * 10 ** k]) {
          sameBits(String(value));
          if (Number.isFinite(value)) for (const p of [15, 16, 17]) sameBits(value.toPrecision(p));
        }
      }),
      { numRuns: 10_000, seed: 2 },
    );
  });

  test('at rounding boundaries: halfway cases of 16 and 17 digits and their neighbours on both sides', () => {
    // 2^53 + 1 lies halfway between two doubles and rounds to the even one below; 2^53 + 3 to the one above.
    expect(parse('9007199254740993')).toBe(9007199254740992);
    expect(parse('9007199254740995')).toBe(9007199254740996);
    for (const text of ['9007199254740991', '9007199254740992', '9007199254740994', '90071992547409930'])
      sameBits(text);
    for (let k = 0; k <= 22; k++) {
      for (const text of ['9007199254740993', '9007199254740992.9', '45035996273704985', '45035996273704995']) {
        sameBits(`${text.slice(0, 1)}.${text.slice(1).replace('.', '')}e-${k}`);
      }
    }
    // A halfway case with a fraction: (2^53 + 1) / 2^10 has 26 digits, so its 17-digit neighbours stand on both sides.
    for (const text of ['8796093022208.000976', '8796093022208.0009', '8796093022208.0010']) sameBits(text);
  });

  test('at the limits of the fast paths: 15 and 16 digits, powers 22 and 23, 17 and 18 digits', () => {
    for (const mantissa of ['999999999999999', '9999999999999999', '99999999999999999', '999999999999999999']) {
      for (const e of [-24, -23, -22, -21, 0, 1, 21, 22, 23, 24]) sameBits(`${mantissa}e${e}`);
    }
    for (const text of ['1e308', '1.7976931348623157e308', '1.7976931348623159e308', '5e-324', '2e-324', '1e400']) {
      sameBits(text);
    }
    for (const text of ['1e0001', '1e00001', '1e-99999', '0e99999', '-0', '-0.0e5', '000000000000000000001.5']) {
      sameBits(text);
    }
  });
});

describe('words', () => {
  test('nothing, null and nan in any case stand for a missing value and for no number', () => {
    for (const text of ['', 'NULL', 'null', 'Null', 'NaN', 'nan', 'NAN', '-nan', '+NaN']) {
      expect(missing(text), text).toBe(true);
      expect(parse(text), text).toBeNaN();
    }
  });

  test('inf and infinity in any case, with a sign or without, are infinities and not missing', () => {
    for (const text of ['inf', 'Inf', '+inf', 'Infinity', 'INFINITY']) expect(parse(text), text).toBe(Infinity);
    for (const text of ['-inf', '-Infinity']) expect(parse(text), text).toBe(-Infinity);
    expect(missing('inf')).toBe(false);
  });

  test('everything else is malformed: neither a number nor missing', () => {
    const malformed = [
      'NA',
      'N/A',
      '-',
      '+',
      '.',
      '-.',
      '1_000',
      '1,5',
      '0x10',
      '0b1',
      '1e',
      '1e+',
      'e5',
      '1.2.3',
      '1 2',
    ];
    malformed.push('12abc', '--1', '+-1', '1d5', '.inf', 'infin', 'nanx', 'nul', '1e5.0', ' 1', '1 ', '-null', '١');
    for (const text of malformed) {
      expect(parse(text), text).toBeNaN();
      expect(missing(text), text).toBe(false);
    }
  });

  test('only the bytes of the field are looked at', () => {
    const bytes = bytesOf('12345.6789e1');
    expect(parseNumber(bytes, 1, 4)).toBe(234);
    expect(parseNumber(bytes, 3, 7)).toBe(45.6);
    expect(parseNumber(bytesOf('-5'), 0, 1)).toBeNaN();
    expect(parseNumber(bytesOf('1e5'), 0, 2)).toBeNaN();
    expect(parseNumber(bytesOf('5-'), 1, 1)).toBeNaN();
  });
});
