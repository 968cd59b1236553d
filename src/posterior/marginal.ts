import { columnOf, type Posterior } from './posterior';
import { shareMoments } from './share-moments';

/**
 * Marginal posterior of the probability of one outcome, or of the sum of several: a Beta distribution.
 * `exact` for a Dirichlet column; `matched` where the column is weighted and the Beta has the exact mean and variance
 * of the normalised gammas, but not their exact form. `a = 0` is certainty of 0, `b = 0` certainty of 1.
 */
export interface Marginal {
  a: number;
  b: number;
  method: 'exact' | 'matched';
}

/** Marginal of the summed probability of `chosen` outcomes in column `j` (statistics.md 4). */
export function marginalOf(posterior: Posterior, j: number, chosen: readonly number[]): Marginal {
  const { shape, scale } = columnOf(posterior, j);
  const total = shape.reduce((sum, a) => sum + a, 0);
  if (total === 0) throw new RangeError(`column ${j} has no events and a prior of zero: it has no posterior`);
  if (!scale) {
    const a = chosen.reduce((sum, k) => sum + shape[k]!, 0);
    const rest = shape.reduce((sum, value, k) => (chosen.includes(k) ? sum : sum + value), 0);
    return { a, b: rest, method: 'exact' };
  }
  return matchedBeta(shareMoments(shape, scale, chosen));
}

/** Mean and variance of a marginal. */
export function momentsOf({ a, b }: Marginal): { mean: number; variance: number } {
  const total = a + b;
  return { mean: a / total, variance: (a * b) / (total * total * (total + 1)) };
}

/** The Beta with a given mean and variance; a variance of 0 is certainty. */
function matchedBeta({ mean, variance }: { mean: number; variance: number }): Marginal {
  if (mean <= 0) return { a: 0, b: 1, method: 'matched' };
  if (mean >= 1) return { a: 1, b: 0, method: 'matched' };
  const total = (mean * (1 - mean)) / variance - 1;
  return { a: mean * total, b: (1 - mean) * total, method: 'matched' };
}
