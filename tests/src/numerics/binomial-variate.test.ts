import { readFileSync } from 'node:fs';
import { describe, expect, it } from 'vitest';
import { binomialVariate, LEAST_EXPECTED_FOR_REJECTION } from '../../../src/numerics/binomial-variate';
import { multinomialInto } from '../../../src/numerics/multinomial-variate';
import { PURPOSE, streamOf } from '../../../src/numerics/random';

interface Case {
  trials: number;
  p: number;
  /** Classes `(upTo[i - 1], upTo[i]]` and their probabilities. */
  upTo: number[];
  probability: number[];
  /** The 1 - 1e-6 quantile of chi-square. */
  limit: number;
}

const made = JSON.parse(readFileSync(new URL('../../reference/binomial/values.json', import.meta.url), 'utf8')) as {
  cases: Case[];
};
const DRAWS = 40_000;

describe('A binomial variate', () => {
  it.each(made.cases)('of $trials trials at $p has the probabilities that SciPy gives (chi-square, 1e-6)', (c) => {
    const stream = streamOf(20261201, PURPOSE.runDrift, c.trials, 0);
    const seen = new Float64Array(c.upTo.length);
    for (let i = 0; i < DRAWS; i++) {
      const k = binomialVariate(stream, c.trials, c.p);
      seen[c.upTo.findIndex((end) => k <= end)]! += 1;
    }
    const chiSquare = c.probability.reduce((sum, p, i) => sum + (seen[i]! - DRAWS * p) ** 2 / (DRAWS * p), 0);
    expect(chiSquare).toBeLessThan(c.limit);
  });

  it('has the mean and variance of its law on both sides of the change of method, within 5 standard errors', () => {
    for (const expected of [LEAST_EXPECTED_FOR_REJECTION * 0.999, LEAST_EXPECTED_FOR_REJECTION * 1.001]) {
      const [trials, p] = [100, expected / 100];
      const stream = streamOf(7, PURPOSE.runDrift, 0, 0);
      const values = Array.from({ length: DRAWS }, () => binomialVariate(stream, trials, p));
      const mean = values.reduce((a, b) => a + b, 0) / DRAWS;
      const variance = values.reduce((a, b) => a + (b - mean) ** 2, 0) / (DRAWS - 1);
      const law = trials * p * (1 - p);
      expect(Math.abs(mean - trials * p)).toBeLessThan(5 * Math.sqrt(law / DRAWS));
      expect(Math.abs(variance - law)).toBeLessThan(5 * law * Math.sqrt(2 / DRAWS));
    }
  });

  it('is certain at probabilities 0 and 1, beyond them by rounding, and without trials', () => {
    const stream = streamOf(7, PURPOSE.runDrift, 0, 0);
    expect([0, -1e-17, 1, 1 + 1e-15].map((p) => binomialVariate(stream, 12, p))).toEqual([0, 0, 12, 12]);
    expect(binomialVariate(stream, 0, 0.4)).toBe(0);
  });
});

describe('A multinomial variate', () => {
  it('shares out every trial, leaves cells of weight 0 empty, and has the mean and covariance of its law', () => {
    const stream = streamOf(11, PURPOSE.runDrift, 0, 0);
    const weights = Float64Array.of(0, 2, 0, 5, 3, 0);
    const out = new Float64Array(6);
    const sum = new Float64Array(6);
    let product = 0;
    for (let i = 0; i < DRAWS; i++) {
      multinomialInto(stream, 30, weights, out);
      expect(out.reduce((a, b) => a + b)).toBe(30);
      out.forEach((n, k) => (sum[k]! += n));
      product += (out[1]! - 6) * (out[3]! - 15);
    }
    expect([sum[0], sum[2], sum[5]]).toEqual([0, 0, 0]);
    for (const [k, p] of [
      [1, 0.2],
      [3, 0.5],
      [4, 0.3],
    ] as const) {
      expect(Math.abs(sum[k]! / DRAWS - 30 * p)).toBeLessThan(5 * Math.sqrt((30 * p * (1 - p)) / DRAWS));
    }
    // Cov = -n p q; the spread of the product is near sqrt(V1 V3 + Cov^2).
    expect(Math.abs(product / DRAWS + 30 * 0.2 * 0.5)).toBeLessThan(5 * Math.sqrt((4.8 * 7.5 + 9) / DRAWS));
  });

  it('refuses trials without any weight', () => {
    const stream = streamOf(11, PURPOSE.runDrift, 0, 0);
    expect(() => multinomialInto(stream, 1, new Float64Array(2), new Float64Array(2))).toThrow(RangeError);
    multinomialInto(stream, 0, new Float64Array(2), new Float64Array(2));
  });
});
