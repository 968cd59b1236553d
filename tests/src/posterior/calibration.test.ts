import { describe, expect, it } from 'vitest';
import { betaCdf } from '../../../src/numerics/beta';
import { multinomialInto } from '../../../src/numerics/multinomial-variate';
import { PURPOSE, streamOf } from '../../../src/numerics/random';
import { cellMarginals } from '../../../src/posterior/marginal';
import { posteriorOf } from '../../../src/posterior/posterior';
import { summarise } from '../../../src/posterior/summary';

const COLUMNS = 4000;
const OUTCOMES = 5;
const PSEUDO_COUNT = 0.5;
/** Events of a column, thin ones and an empty one among them. */
const SIZES = [0, 1, 4, 30, 1000];

/** Columns drawn from their own prior, and events drawn from them: what simulation-based calibration starts from. */
function simulated(seed: number): { truth: Float64Array; events: Float64Array } {
  const stream = streamOf(seed, PURPOSE.test, 0, 0);
  const truth = new Float64Array(COLUMNS * OUTCOMES);
  const events = new Float64Array(COLUMNS * OUTCOMES);
  for (let j = 0; j < COLUMNS; j++) {
    const x = Float64Array.from({ length: OUTCOMES }, () => stream.gamma(PSEUDO_COUNT));
    const total = x.reduce((a, b) => a + b);
    const [from, end] = [j * OUTCOMES, (j + 1) * OUTCOMES];
    truth.set(
      x.map((value) => value / total),
      from,
    );
    multinomialInto(stream, SIZES[j % SIZES.length]!, truth.subarray(from, end), events.subarray(from, end));
  }
  return { truth, events };
}

/** Simulation-based calibration (Talts et al., arXiv:1804.06788) of the posterior of 4000 columns of 0 to 1000 events. */
describe('calibration of the posterior by simulation', () => {
  const { truth, events } = simulated(8);
  const prior = { columns: COLUMNS, outcomes: OUTCOMES, counts: new Float64Array(truth.length).fill(PSEUDO_COUNT) };
  const posterior = posteriorOf({ events, weights: null, squares: null }, prior);

  it('the true probability of a cell has a uniform place in its posterior, in columns of every size', () => {
    const bins = 20;
    for (const [size] of SIZES.entries()) {
      const places = new Float64Array(bins);
      for (let j = size; j < COLUMNS; j += SIZES.length) {
        const k = Math.floor(j / SIZES.length) % OUTCOMES;
        const { a, b } = cellMarginals(posterior, j)[k]!;
        places[Math.min(bins - 1, Math.floor(bins * betaCdf(truth[j * OUTCOMES + k]!, a, b)))]!++;
      }
      const expected = COLUMNS / SIZES.length / bins;
      const chiSquared = places.reduce((sum, n) => sum + (n - expected) ** 2 / expected, 0);
      // 19 degrees of freedom: mean 19, variance 38; five standard deviations.
      expect(chiSquared, `columns of ${SIZES[size]} events`).toBeLessThan(19 + 5 * Math.sqrt(38));
    }
  });

  it('intervals of every kind, upper limits included, hold the truth as often as they say, within 4 standard errors', () => {
    for (const credibility of [0.68, 0.95]) {
      for (const kind of ['equal-tailed', 'shortest'] as const) {
        const { lower, upper } = summarise(posterior, events, credibility, kind);
        for (const [size] of SIZES.entries()) {
          let held = 0;
          // One outcome a column: those of a column are not independent.
          for (let j = size; j < COLUMNS; j += SIZES.length) {
            const i = j * OUTCOMES + (Math.floor(j / SIZES.length) % OUTCOMES);
            if (truth[i]! >= lower[i]! && truth[i]! <= upper[i]!) held++;
          }
          const n = COLUMNS / SIZES.length;
          const error = Math.sqrt((credibility * (1 - credibility)) / n);
          expect(Math.abs(held / n - credibility), `${kind}, ${SIZES[size]} events`).toBeLessThan(4 * error);
        }
      }
    }
  });
});
