import { describe, expect, it } from 'vitest';
import {
  bytes,
  count,
  decimalsFor,
  duration,
  exact,
  interval,
  labelled,
  percent,
  plain,
  plural,
  plusMinus,
  probability,
  value,
  withUnit,
} from '../../renderer/words/number';

/** The tests are easier to read with plain spaces and hyphens; the characters themselves are checked once below. */
const read = (text: string) => text.replaceAll('\u202f', '_').replaceAll('\u2212', '-').replaceAll('\u00d7', 'x');

describe('numbers on the screen', () => {
  it('groups thousands by a narrow space that does not break and signs with a true minus', () => {
    expect(count(300214)).toBe('300\u202f214');
    expect(value(-1234.5)).toBe('\u22121\u202f235');
  });

  it('rounds a value to significant digits and keeps the zeros that were measured', () => {
    expect(read(value(0.87316, 3))).toBe('0.873');
    expect(read(value(0.5, 3))).toBe('0.500');
    expect(read(value(0))).toBe('0');
    expect(read(value(99.996, 4))).toBe('100.0');
  });

  it('writes what is tiny or huge as a power of ten, on both sides of the border', () => {
    expect(read(value(0.00123, 2))).toBe('0.0012');
    expect(read(value(0.000123, 2))).toBe('1.2_x_10\u207b\u2074');
    expect(read(value(123456, 3))).toBe('123_000');
    expect(read(value(1234567, 3))).toBe('1.23_x_10\u2076');
  });

  it('shows an uncertainty to two significant digits and the value to match (GUM 7.2.6)', () => {
    // JCGM 100:2008, 7.2.2 and 7.2.6: y = 10.057 62 ohm with u = 27 milliohm is 10.058 ohm, u to two digits.
    expect(read(plusMinus(10.05762, 0.027, 'ohm'))).toBe('(10.058 \u00b1 0.027)_ohm');
    expect(read(plusMinus(0.87314, 0.0058))).toBe('0.8731 \u00b1 0.0058');
    expect(read(plusMinus(81234, 250, 'keV'))).toBe('(81_230 \u00b1 250)_keV');
    expect(read(plusMinus(3.14e-7, 2.2e-8))).toBe('(3.14 \u00b1 0.22)_x_10\u207b\u2077');
  });

  it('rounds 0.0996 up to 0.10, which has one decimal place less', () => {
    expect(decimalsFor(0.0994)).toBe(3);
    expect(decimalsFor(0.0996)).toBe(2);
    expect(decimalsFor(250)).toBe(-1);
  });

  it('shows an interval to two digits of its half width', () => {
    expect(interval({ value: 0.87314, lower: 0.86121, upper: 0.88501 })).toBe('0.873 (0.861 to 0.885)');
    expect(read(interval({ value: 1204.2, lower: 1100, upper: 1300 }, 'MeV'))).toBe('1_200 (1_100 to 1_300)_MeV');
  });

  it('says "no event, below" where a cell has none', () => {
    const cell = { value: 0.0008, lower: 0, upper: 0.00312 };
    expect(read(probability(cell, 0, 0.95))).toBe('no event, below 0.0031 at 95_%');
    expect(read(probability({ value: 0.5, lower: 0.4, upper: 0.6 }, 12, 0.95))).toBe('0.50 (0.40 to 0.60)');
  });

  it('gives a dash, never NaN, for what is not a number', () => {
    for (const text of [
      count(NaN),
      value(null),
      value(Infinity),
      plusMinus(NaN, 1),
      percent(null),
      duration(NaN),
      bytes(NaN),
    ]) {
      expect(text).toBe('\u2013');
    }
    expect(interval({ value: null, lower: null, upper: null })).toBe('\u2013');
    expect(interval({ value: 0.5, lower: null, upper: null })).toBe('0.5000');
  });

  it('keeps every digit of an edge and adds none', () => {
    expect(exact(0.1)).toBe('0.1');
    expect(read(exact(-12345.25))).toBe('-12_345.25');
    expect(read(exact(1e-9))).toBe('1_x_10\u207b\u2079');
    expect(read(exact(2.5e-9))).toBe('2.5_x_10\u207b\u2079');
  });

  it('never signs a rounded zero', () => {
    expect(plusMinus(-0.00001, 0.01)).toBe('0.000 \u00b1 0.010');
  });

  it('names shares, sizes, spans and counts with their unit', () => {
    expect(read(percent(0.62))).toBe('62_%');
    expect(read(percent(0.99951, 4))).toBe('99.95_%');
    expect(read(bytes(999))).toBe('999_B');
    expect(read(bytes(1_234_567))).toBe('1.2_MB');
    expect(read(duration(0.42))).toBe('0.4_s');
    expect(read(duration(200))).toBe('3_min 20_s');
    expect(read(duration(7500))).toBe('2_h 5_min');
    expect(plural(1, 'file')).toBe('1 file');
    expect(plural(3, 'file')).toBe('3 files');
    expect(read(withUnit('20', 'MeV'))).toBe('20_MeV');
    expect(labelled('', 'MeV', 'True value')).toBe('True value, MeV');
  });

  it('gives the clipboard plain digits', () => {
    expect(plain('\u22121\u202f235\u202fMeV')).toBe('-1 235 MeV');
  });
});
