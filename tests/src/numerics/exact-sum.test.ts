import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import { ExactSums } from '../../../src/numerics/exact-sum';

const sumOf = (values: readonly number[]): ExactSums => {
  const sums = new ExactSums(1);
  for (const x of values) sums.add(0, x);
  return sums;
};

/** The exact sum by integers: every double is an integer times 2^-1074. */
const exactly = (values: readonly number[]): bigint => values.reduce((sum, x) => sum + scaled(x), 0n);
function scaled(x: number): bigint {
  const bits = new BigUint64Array(Float64Array.of(x).buffer)[0]!;
  const exponent = Number((bits >> 52n) & 0x7ffn);
  const fraction = bits & 0xfffffffffffffn;
  const magnitude = exponent === 0 ? fraction : (fraction | (1n << 52n)) << BigInt(exponent - 1);
  return bits >> 63n ? -magnitude : magnitude;
}
/** Correct rounding of such an integer, half to even, by hand. */
function rounded(n: bigint): number {
  if (n < 0n) return -rounded(-n);
  const length = n.toString(2).length;
  if (length <= 53) return Number(n) * 2 ** -1074;
  const drop = BigInt(length - 53);
  let head = n >> drop;
  const rest = n - (head << drop);
  const half = 1n << (drop - 1n);
  if (rest > half || (rest === half && head & 1n)) head += 1n;
  return Number(head) * 2 ** Math.min(900, Number(drop) - 1074) * 2 ** Math.max(0, Number(drop) - 1974);
}

const weights = fc.double({ noNaN: true, noDefaultInfinity: true, min: -1e150, max: 1e150 });

describe('exact sums', () => {
  it('are what Python calls math.fsum of the same numbers (Python 3.11 documentation and by hand)', () => {
    expect(sumOf(Array(10).fill(0.1)).value(0)).toBe(1);
    expect(sumOf([1e100, 1, -1e100]).value(0)).toBe(1);
    expect(sumOf([1, 2 ** -53, 2 ** -106]).value(0)).toBe(1 + 2 ** -52);
    expect(sumOf([1, 2 ** -53]).value(0)).toBe(1);
    expect(sumOf([]).value(0)).toBe(0);
  });

  it('are the true sum, correctly rounded, for any numbers', () => {
    fc.assert(
      fc.property(fc.array(weights, { maxLength: 60 }), (values) => {
        expect(sumOf(values).value(0) + 0).toBe(rounded(exactly(values)) + 0);
      }),
      { numRuns: 500 },
    );
  });

  it('have the same value and the same bytes in any order and any split', () => {
    fc.assert(
      fc.property(fc.array(weights, { maxLength: 40 }), fc.array(fc.nat(), { maxLength: 40 }), (values, keys) => {
        const shuffled = values
          .map((x, i) => [keys[i] ?? i, x] as const)
          .sort((a, b) => a[0] - b[0])
          .map(([, x]) => x);
        const parts = [sumOf(shuffled.slice(0, 7)), sumOf(shuffled.slice(7))].map((part) =>
          ExactSums.fromParts(part.toParts()),
        );
        const joined = new ExactSums(1);
        for (const part of parts) joined.merge(part);
        expect(joined.canonicalParts()).toEqual(sumOf(values).canonicalParts());
      }),
      { numRuns: 300 },
    );
  });

  it('grow their room when a cell needs more, and keep the others', () => {
    const sums = new ExactSums(3);
    sums.add(0, 0.5);
    sums.add(2, -3);
    const powers = Array.from({ length: 12 }, (_, i) => 2 ** (60 * i - 300));
    for (const x of powers) sums.add(1, x);
    for (const x of powers.slice(1)) sums.add(1, -x);
    expect([...sums.values()]).toEqual([0.5, powers[0], -3]);
  });
});
