import { describe, expect, it } from 'vitest';
import { BLOCK, drawBlock, planEnsemble } from '../../../src/ensemble/draw';
import { PURPOSE, streamOf } from '../../../src/numerics/random';

const REPLICAS = 12_800;
const OUTCOMES = 4;

/** Weights of the events of each outcome, `[outcome][event]`. */
type Column = Float64Array[];

/** Gamma shapes `W^2 / V` and scales `V / W` of the cells (statistics.md 3, without a prior), drawn by the sampler. */
function ensemble(column: Column): Float64Array {
  const W = column.map((weights) => weights.reduce((a, w) => a + w, 0));
  const V = column.map((weights) => weights.reduce((a, w) => a + w * w, 0));
  const plan = planEnsemble({
    columns: 1,
    outcomes: OUTCOMES,
    shape: Float64Array.from(W, (w, k) => (w * w) / V[k]!),
    scale: Float64Array.from(W, (w, k) => V[k]! / w),
  });
  const out = new Float64Array(REPLICAS * OUTCOMES);
  const size = BLOCK * OUTCOMES;
  for (let block = 0; block < REPLICAS / BLOCK; block++) {
    drawBlock(plan, 20261201, block, BLOCK, out.subarray(block * size, (block + 1) * size));
  }
  return out;
}

/** The Bayesian bootstrap of the events (Rubin, Ann. Stat. 9 (1981) 130): each weight times an exponential, summed a cell, normalised. */
function bootstrap(column: Column): Float64Array {
  const stream = streamOf(5, PURPOSE.test, 0, 0);
  const out = new Float64Array(REPLICAS * OUTCOMES);
  for (let r = 0; r < REPLICAS; r++) {
    const sums = column.map((weights) => weights.reduce((sum, w) => sum + w * stream.exponential(), 0));
    const total = sums.reduce((a, b) => a + b);
    sums.forEach((sum, k) => (out[r * OUTCOMES + k] = sum / total));
  }
  return out;
}

function logNormalWeights(count: number, spread: number, seed: number): Float64Array {
  const stream = streamOf(seed, PURPOSE.test, 1, 0);
  return Float64Array.from({ length: count }, () => Math.exp(spread * stream.normal()));
}

/** Mean, standard deviation and the ends of the central 68 % and 95 % of one outcome's share. */
function summary(all: Float64Array, outcome: number): { mean: number; sd: number; ends: number[] } {
  const shares = Float64Array.from({ length: REPLICAS }, (_, r) => all[r * OUTCOMES + outcome]!).sort();
  const mean = shares.reduce((a, b) => a + b) / REPLICAS;
  const sd = Math.sqrt(shares.reduce((sum, p) => sum + (p - mean) ** 2, 0) / (REPLICAS - 1));
  return { mean, sd, ends: TAILS.map((tail) => shares[Math.floor(tail * REPLICAS)]!) };
}

const TAILS = [0.16, 0.84, 0.025, 0.975];
/** Standard error of such an end in standard deviations, `sqrt(p (1 - p) / n) / density`, at a normal law. */
const END_ERRORS = [1.51, 1.51, 2.67, 2.67].map((error) => error / Math.sqrt(REPLICAS));

describe.each<[string, Column]>([
  ['of weights that spread by 30 %', [400, 150, 60, 900].map((n, k) => logNormalWeights(n, 0.3, k + 1))],
  [
    'of two weights, 1 and 0.2, in shares that differ from cell to cell',
    [0.9, 0.5, 0.2, 0.7].map((share) => Float64Array.from({ length: 500 }, (_, i) => (i < share * 500 ? 1 : 0.2))),
  ],
  [
    'of weights that differ from cell to cell and hardly within one',
    [0.3, 1, 3, 0.1].map((w, k) => logNormalWeights(300, 0.1, k + 1).map((x) => w * x)),
  ],
])('A weighted column %s', (_, column) => {
  const [sampled, expected] = [ensemble(column), bootstrap(column)];

  it.each([0, 1, 2, 3])(
    'agrees with the Bayesian bootstrap of its events in mean, variance and 68 and 95 %% intervals, outcome %d',
    (k) => {
      const [found, known] = [summary(sampled, k), summary(expected, k)];
      // Two independent samples: their difference has sqrt(2) standard errors. 4 of those, and 2 % for the shape of the tails.
      expect(Math.abs(found.mean - known.mean)).toBeLessThan(4 * known.sd * Math.sqrt(2 / REPLICAS));
      expect(Math.abs(found.sd / known.sd - 1)).toBeLessThan(4 * Math.sqrt(1 / REPLICAS));
      found.ends.forEach((end, i) => {
        expect(Math.abs(end - known.ends[i]!) / known.sd).toBeLessThan(4 * Math.SQRT2 * END_ERRORS[i]! + 0.02);
      });
    },
  );
});

describe('A column of equal weights', () => {
  it('is the Dirichlet of its counts, to the bit', () => {
    const counts = [40, 7, 1, 120];
    const weighted = ensemble(counts.map((n) => new Float64Array(n).fill(0.25)));
    const plan = planEnsemble({ columns: 1, outcomes: OUTCOMES, shape: Float64Array.from(counts), scale: null });
    const plain = new Float64Array(BLOCK * OUTCOMES);
    drawBlock(plan, 20261201, 3, BLOCK, plain);
    expect(weighted.slice(3 * plain.length, 4 * plain.length)).toEqual(plain);
  });
});
