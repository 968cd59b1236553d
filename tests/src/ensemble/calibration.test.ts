import { describe, expect, it } from 'vitest';
import { drawBlock, planEnsemble } from '../../../src/ensemble/draw';
import { betaCdf, betaQuantile, betaQuantileUpper } from '../../../src/numerics/beta';
import { multinomialInto } from '../../../src/numerics/multinomial-variate';
import { PURPOSE, streamOf } from '../../../src/numerics/random';

/**
 * Simulation-based calibration (Talts, Betancourt, Simpson, Vehtari & Gelman, arXiv:1804.06788): a truth drawn from the prior and
 * events drawn from the truth make the rank of the truth among posterior replicas uniform, whatever the number of events.
 */
const COLUMNS = 4_000;
const OUTCOMES = 5;
const REPLICAS = 31;
const EVENTS = [0, 1, 3, 10, 100, 3_000];
/** Chi-square of 15 degrees of freedom exceeds this with probability 1e-6 (SciPy `chi2.isf(1e-6, 15)`). */
const CHI_SQUARE_LIMIT = 55.9;
const CLASSES = 16;

interface Simulated {
  truth: Float64Array;
  shape: Float64Array;
  /** Events of each column: a sixth of the columns each, thin ones included. */
  events: (column: number) => number;
}

function simulate(prior: number, seed: number): Simulated {
  const [truth, shape] = [new Float64Array(COLUMNS * OUTCOMES), new Float64Array(COLUMNS * OUTCOMES)];
  const events = (column: number): number => EVENTS[column % EVENTS.length]!;
  const counts = new Float64Array(OUTCOMES);
  for (let column = 0; column < COLUMNS; column++) {
    const stream = streamOf(seed, PURPOSE.test, column, 0);
    const gammas = Float64Array.from({ length: OUTCOMES }, () => stream.gamma(prior));
    const total = gammas.reduce((a, b) => a + b);
    multinomialInto(stream, events(column), gammas, counts);
    for (let k = 0; k < OUTCOMES; k++) {
      truth[column * OUTCOMES + k] = gammas[k]! / total;
      shape[column * OUTCOMES + k] = prior + counts[k]!;
    }
  }
  return { truth, shape, events };
}

/** One outcome a column takes part, another one each time: the shares of one column are not independent. */
const cellOf = (column: number): number => column * OUTCOMES + (Math.floor(column / EVENTS.length) % OUTCOMES);

function chiSquare(classes: readonly number[]): number {
  const seen = new Array<number>(CLASSES).fill(0);
  for (const i of classes) seen[i]! += 1;
  const expected = classes.length / CLASSES;
  return seen.reduce((sum, n) => sum + (n - expected) ** 2 / expected, 0);
}

const columns = Array.from({ length: COLUMNS }, (_, column) => column);

describe.each([
  [0.5, 11],
  [1, 12],
  [0.2, 13],
])('Columns simulated from a prior of %d a cell', (prior, seed) => {
  const { truth, shape, events } = simulate(prior, seed);

  it('rank uniformly among the replicas of their ensemble (chi-square, 1e-6), all together and the thin ones alone', () => {
    const out = new Float64Array(REPLICAS * COLUMNS * OUTCOMES);
    drawBlock(planEnsemble({ columns: COLUMNS, outcomes: OUTCOMES, shape, scale: null }), seed, 0, REPLICAS, out);
    const classOf = (column: number): number => {
      const cell = cellOf(column);
      let rank = 0;
      for (let r = 0; r < REPLICAS; r++) if (out[r * COLUMNS * OUTCOMES + cell]! < truth[cell]!) rank++;
      return Math.floor((rank * CLASSES) / (REPLICAS + 1));
    };
    expect(chiSquare(columns.map(classOf))).toBeLessThan(CHI_SQUARE_LIMIT);
    expect(chiSquare(columns.filter((j) => events(j) <= 3).map(classOf))).toBeLessThan(CHI_SQUARE_LIMIT);
  });

  const marginal = (column: number): [number, number, number] => {
    const cell = cellOf(column);
    const all = shape.subarray(column * OUTCOMES, (column + 1) * OUTCOMES).reduce((a, b) => a + b);
    return [truth[cell]!, shape[cell]!, all - shape[cell]!];
  };

  it('have truths that pass their Beta distribution functions uniformly (chi-square, 1e-6)', () => {
    const classOf = (column: number): number =>
      Math.min(CLASSES - 1, Math.floor(betaCdf(...marginal(column)) * CLASSES));
    expect(chiSquare(columns.map(classOf))).toBeLessThan(CHI_SQUARE_LIMIT);
  });

  it.each([0.68, 0.95])(
    'have truths inside the equal-tailed interval of credibility %d that often, within 4 standard errors',
    (credibility) => {
      const tail = (1 - credibility) / 2;
      const inside = columns.filter((column) => {
        const [p, a, b] = marginal(column);
        return p >= betaQuantile(tail, a, b) && p <= betaQuantileUpper(tail, a, b);
      }).length;
      expect(Math.abs(inside - COLUMNS * credibility)).toBeLessThan(
        4 * Math.sqrt(COLUMNS * credibility * (1 - credibility)),
      );
    },
  );
});
