import { betaCdf, betaQuantile } from '../../../src/numerics/beta';

/** Kolmogorov's limit: `sqrt(n) D` exceeds 2.7 with probability 1e-6 (`2 exp(-2 * 2.7^2)`). */
export const LIMIT = 2.7;

/**
 * `sqrt(n)` times the largest distance of the distribution of `draws` from a law, at 400 of the law's quantiles and at powers of ten near 0
 * and 1. A maximum over some points is at most that over all, so that Kolmogorov's limit holds; unlike the full
 * statistic it is right where draws of tiny shapes round to 0 or 1.
 */
export function distance(draws: Float64Array, cdf: (x: number) => number, points: readonly number[]): number {
  const sorted = draws.toSorted();
  let worst = 0;
  for (const x of points) worst = Math.max(worst, Math.abs(countUpTo(sorted, x) / sorted.length - cdf(x)));
  return Math.sqrt(sorted.length) * worst;
}

export function distanceFromBeta(draws: Float64Array, a: number, b: number): number {
  const quantiles = Array.from({ length: 399 }, (_, i) => betaQuantile((i + 1) / 400, a, b));
  const small = Array.from({ length: 60 }, (_, i) => 10 ** (-5 * i - 1));
  const points = [...quantiles, ...small, ...small.slice(0, 3).map((x) => 1 - x)].filter(
    (x) => x > 1e-300 && x < 1 - 1e-15,
  );
  return distance(draws, (x) => betaCdf(x, a, b), points);
}

function countUpTo(sorted: Float64Array, x: number): number {
  let [from, to] = [0, sorted.length];
  while (from < to) {
    const middle = (from + to) >> 1;
    if (sorted[middle]! <= x) from = middle + 1;
    else to = middle;
  }
  return from;
}
