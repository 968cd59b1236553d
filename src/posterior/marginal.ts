import { columnOf, type Posterior } from './posterior';
import { columnMoments, complements, shareMoments } from './share-moments';

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

/**
 * Marginal of the summed probability of `chosen` outcomes in column `j` (statistics.md 4).
 * Throws `RangeError` for a column without posterior.
 */
export function marginalOf(posterior: Posterior, j: number, chosen: readonly number[]): Marginal {
  const { shape, scale } = columnOf(posterior, j);
  if (scale) return matchedBeta(shareMoments(shape, scale, chosen));
  const members = new Set(chosen);
  let a = 0;
  let b = 0;
  shape.forEach((value, k) => (members.has(k) ? (a += value) : (b += value)));
  if (a + b === 0) throw new RangeError(`column ${j} has no events and a prior of zero: it has no posterior`);
  return { a, b, method: 'exact' };
}

/**
 * Marginal of the probability of `chosen` outcomes given that one of `among` happened, `chosen` within `among`: a part
 * of a Dirichlet is a Dirichlet, a part of normalised gammas normalised gammas. `null` where the column has no posterior
 * on `among`: no events there and a prior of zero.
 */
export function conditionalMarginal(
  posterior: Posterior,
  j: number,
  chosen: readonly number[],
  among: readonly number[],
): Marginal | null {
  const column = columnOf(posterior, j);
  const shape = Float64Array.from(among, (k) => column.shape[k]!);
  if (shape.every((a) => a === 0)) return null;
  const scale = column.scale && Float64Array.from(among, (k) => column.scale![k]!);
  const part = { ...posterior, columns: 1, outcomes: among.length, shape, scale };
  const places = new Map(among.map((k, place) => [k, place]));
  return marginalOf(
    part,
    0,
    chosen.map((k) => places.get(k)!),
  );
}

/** Marginal of every single outcome of column `j`, as `marginalOf` of each but at the cost of one. */
export function cellMarginals(posterior: Posterior, j: number): Marginal[] {
  const { shape, scale } = columnOf(posterior, j);
  const { mean, variance } = columnMoments(shape, scale);
  if (scale) return [...mean].map((m, k) => matchedBeta({ mean: m, variance: variance[k]! }));
  const rest = complements(shape);
  return [...shape].map((a, k) => ({ a, b: rest[k]!, method: 'exact' }));
}

/** Mean and variance of a marginal. */
export function momentsOf({ a, b }: Marginal): { mean: number; variance: number } {
  const total = a + b;
  return { mean: a / total, variance: ((a / total) * (b / total)) / (total + 1) };
}

/** The Beta with a given mean and variance; a variance of 0 is certainty of the nearer end. */
export function matchedBeta({ mean, variance }: { mean: number; variance: number }): Marginal {
  if (mean <= 0 || mean >= 1 || variance === 0) {
    return { a: mean < 0.5 ? 0 : 1, b: mean < 0.5 ? 1 : 0, method: 'matched' };
  }
  // A total below the rounding of this very quotient is that rounding: the variance is the largest a mean allows.
  const total = Math.max((mean * (1 - mean)) / variance - 1, Number.EPSILON);
  return { a: mean * total, b: (1 - mean) * total, method: 'matched' };
}
