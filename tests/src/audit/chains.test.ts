import { readFileSync } from 'node:fs';
import { describe, expect, it } from 'vitest';
import { effectiveDraws, splitRhat } from '../../../src/audit/chains';
import { PURPOSE, streamOf } from '../../../src/numerics/random';

const made = JSON.parse(readFileSync(new URL('../../reference/chains/values.json', import.meta.url), 'utf8')) as {
  cases: { name: string; chains: number[][]; rhat: number; effective: number }[];
};

describe('Chains', () => {
  it.each(made.cases)('that are $name have the R-hat and effective draws of NumPy (tests/reference/chains)', (c) => {
    const chains = c.chains.map((chain) => Float64Array.from(chain));
    expect(splitRhat(chains)).toBeCloseTo(c.rhat, 12);
    expect(effectiveDraws(chains) / c.effective).toBeCloseTo(1, 9);
  });

  it('of an autoregressive law have the effective draws that its correlation leaves: (1 - phi) / (1 + phi) of all', () => {
    const stream = streamOf(1, PURPOSE.test, 30, 0);
    const phi = 0.6;
    const chains = [0, 1, 2, 3].map(() => {
      const chain = new Float64Array(20_000);
      for (let i = 1; i < chain.length; i++) chain[i] = phi * chain[i - 1]! + stream.normal();
      return chain;
    });
    expect(effectiveDraws(chains) / 80_000 / (0.4 / 1.6)).toBeCloseTo(1, 1);
    expect(splitRhat(chains)).toBeLessThan(1.001);
  });

  it('that do not move agree and lose nothing; of odd length they are refused', () => {
    const still = [new Float64Array(10).fill(3), new Float64Array(10).fill(3)];
    expect([splitRhat(still), effectiveDraws(still)]).toEqual([1, 20]);
    expect(() => splitRhat([new Float64Array(5)])).toThrow(RangeError);
  });
});
