import { logGammaVariate, SMALLEST_SHAPE } from '../numerics/gamma-variate';
import type { RandomStream } from '../numerics/random';
import type { Interval } from '../posterior/intervals';
import type { Marginal } from '../posterior/marginal';

/** Draws behind an interval that has no closed form: its ends move by about 3 % of its width from seed to seed. */
export const DRAWS = 1000;

/** Below this shape a gamma variate can underflow (`P(Gamma(a) < 1e-300)` is `1e-300^a`): its logarithm does not. */
export const ANCHOR_SHAPE = 0.1;

/** A variate of a marginal posterior: `x / (x + y)` of two gammas; certainty where a shape is 0. */
export function betaVariate(stream: RandomStream, { a, b }: Marginal): number {
  if (a === 0 || b === 0) return a === 0 ? 0 : 1;
  if (Math.max(a, b) < ANCHOR_SHAPE) {
    const log = (shape: number): number => logGammaVariate(stream, Math.max(shape, SMALLEST_SHAPE));
    return 1 / (1 + Math.exp(-log(a) + log(b)));
  }
  const x = stream.gamma(a);
  return x / (x + stream.gamma(b));
}

/** Equal-tailed interval of draws, which it sorts: interpolated order statistics (type 7 of Hyndman & Fan 1996). */
export function intervalOfDraws(draws: Float64Array, credibility: number): Interval {
  draws.sort();
  const tail = (1 - credibility) / 2;
  return { lower: quantileOfSorted(draws, tail), upper: quantileOfSorted(draws, 1 - tail) };
}

export function quantileOfSorted(sorted: Float64Array, q: number): number {
  const place = q * (sorted.length - 1);
  const below = Math.floor(place);
  const above = Math.min(below + 1, sorted.length - 1);
  return sorted[below]! + (place - below) * (sorted[above]! - sorted[below]!);
}
