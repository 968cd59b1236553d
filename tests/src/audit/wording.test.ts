import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import {
  formatCount,
  formatEvents,
  formatInterval,
  formatNumber,
  formatPercent,
  formatShare,
  formatUncertain,
} from '../../../src/audit/wording';

describe('numbers for people', () => {
  it('an uncertainty has two significant digits and the value as many decimals', () => {
    expect(formatUncertain(12.3, 0.1234)).toBe('12.30 ± 0.12');
    expect(formatUncertain(0.5, 0.0996)).toBe('0.50 ± 0.10');
    expect(formatUncertain(-0.0312, 0.004)).toBe('\u22120.0312 ± 0.0040');
    expect(formatUncertain(54321.6, 1234)).toBe('54\u202f300 ± 1\u202f200');
    expect(formatUncertain(1.23456e-9, 3.4e-11)).toBe('(1.235 ± 0.034) × 10⁻⁹');
    expect(formatUncertain(0, 0.02)).toBe('0.000 ± 0.020');
  });

  it('a certain value is written without uncertainty', () => {
    expect(formatUncertain(0.25, 0)).toBe('0.25');
    expect(formatInterval(1, 1, 1)).toBe('1');
  });

  it('thousands are set apart by a thin no-break space and a negative number has a true minus sign', () => {
    expect(formatCount(1234567)).toBe('1\u202f234\u202f567');
    expect(formatCount(-1000)).toBe('\u22121\u202f000');
    expect(formatCount(999)).toBe('999');
    expect(formatNumber(-0.5)).toBe('\u22120.5');
  });

  it('a number that rounds to zero has no sign', () => {
    expect(formatInterval(-0.0001, -1, 1)).toBe('0.0 (\u22121.0 to 1.0)');
  });

  it('powers of ten begin beyond seven digits and below 0.0001', () => {
    expect(formatNumber(9_999_999)).toBe('9\u202f999\u202f999');
    expect(formatNumber(10_000_000)).toBe('1 × 10⁷');
    expect(formatNumber(0.0001)).toBe('0.0001');
    expect(formatNumber(0.0000999)).toBe('9.99 × 10⁻⁵');
  });

  it('an interval shows two digits of its half-width', () => {
    expect(formatInterval(0.41234, 0.4012, 0.4234)).toBe('0.412 (0.401 to 0.423)');
    expect(formatInterval(2.5e9, 2.4e9, 2.6e9)).toBe('[2.50 (2.40 to 2.60)] × 10⁹');
  });

  it('a share is in percent and a one-sided limit says so', () => {
    expect(formatShare(0.041, 0.032, 0.0511)).toBe('4.10 % (3.20 to 5.11)');
    expect(formatShare(0.001, 0, 0.0049)).toBe('0.1 % (below 0.49 %)');
    expect(formatShare(0.998, 0.991, 1)).toBe('99.8 % (above 99.1 %)');
    expect(formatPercent(0.1)).toBe('10 %');
    expect(formatPercent(0.07)).toBe('7 %');
    expect(formatPercent(0.04997)).toBe('5.00 %');
  });

  it('events to aim for are rounded up to two digits', () => {
    expect(formatEvents(1234)).toBe('1\u202f300');
    expect(formatEvents(7)).toBe('7');
    expect(formatEvents(0.2)).toBe('1');
    expect(formatEvents(100)).toBe('100');
    expect(formatEvents(Infinity)).toBe('no number of');
  });

  it('the printed value never lies further off than half its last digit', () => {
    fc.assert(
      fc.property(
        fc.double({ min: -1e12, max: 1e12, noNaN: true }),
        fc.double({ min: 1e-9, max: 1e9, noNaN: true }),
        (value, sd) => {
          const read = parseUncertain(formatUncertain(value, sd));
          const last = 10 ** (Math.floor(Math.log10(sd)) - 1);
          expect(Math.abs(read.value - value)).toBeLessThanOrEqual(5.1 * last + Math.abs(value) * 1e-14);
          expect(Math.abs(read.sd / sd - 1)).toBeLessThan(0.051);
        },
      ),
    );
  });
});

function parseUncertain(text: string): { value: number; sd: number } {
  const plain = text.replace(/\u202f/g, '').replace(/\u2212/g, '-');
  const power = /× 10(.*)$/.exec(plain)?.[1];
  const digits = '⁰¹²³⁴⁵⁶⁷⁸⁹';
  const exponent = power ? Number([...power].map((c) => (c === '⁻' ? '-' : digits.indexOf(c))).join('')) : 0;
  const [value, sd] = /^\(?(\S+) ± ([^\s)]+)/
    .exec(plain)!
    .slice(1)
    .map((x) => Number(x) * 10 ** exponent);
  return { value: value!, sd: sd! };
}
