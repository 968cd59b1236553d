import { describe, expect, it } from 'vitest';
import { ExactSums } from '../../../src/numerics/exact-sum';
import { reference, relativeMiss } from './reference';

const { sets } = reference<{ sets: { name: string; mean: number; sd: number; values: number[] }[] }>('nist-strd');

const sum = (values: readonly number[]): number => {
  const sums = new ExactSums(1);
  for (const x of values) sums.add(0, x);
  return sums.value(0);
};

/** The data of NumAcc2 to 4 are themselves rounded, by half a unit in the last place of 1, 1e6 and 1e7: so much of 0.1 is lost. */
const TOLERANCE: Record<string, number> = { NumAcc2: 1e-14, NumAcc3: 2e-9, NumAcc4: 2e-8 };

describe('Exact sums of the NIST StRD data sets', () => {
  it('are those of the sets that NIST describes: by name and size', () => {
    expect(sets.map(({ name, values }) => [name, values.length])).toEqual([
      ['Lottery', 218],
      ['Michelso', 100],
      ['NumAcc1', 3],
      ['NumAcc2', 1001],
      ['NumAcc3', 1001],
      ['NumAcc4', 1001],
    ]);
  });

  it.each(sets)('of $name give the certified mean within 1e-14', ({ name, mean, values }) => {
    expect(relativeMiss(name, sum(values) / values.length, mean, 1e-14)).toBeNull();
  });

  it.each(sets)(
    'of $name give the certified standard deviation, from squares of the distances from the mean',
    (set) => {
      const { name, sd, values } = set;
      const mean = sum(values) / values.length;
      const found = Math.sqrt(sum(values.map((x) => (x - mean) ** 2)) / (values.length - 1));
      expect(relativeMiss(name, found, sd, TOLERANCE[name] ?? 1e-13)).toBeNull();
    },
  );

  it.each(sets.slice(0, 2))(
    'of $name as weights give it from W and V alone, but for the digits that their difference loses',
    (set) => {
      const { name, sd, values } = set;
      const [n, W, V] = [values.length, sum(values), sum(values.map((x) => x * x))];
      const found = Math.sqrt((V - (W * W) / n) / (n - 1));
      expect(relativeMiss(name, found, sd, (2e-16 * V) / n / sd ** 2 + 1e-14)).toBeNull();
    },
  );
});
