import { betaQuantile, betaQuantileUpper } from '../numerics/beta';
import { shortestInterval } from '../numerics/shortest-interval';
import type { Marginal } from './marginal';

export interface Interval {
  lower: number;
  upper: number;
}

export type IntervalKind = 'equal-tailed' | 'shortest';

/** The interval that leaves half of `1 - credibility` beyond each end. */
export function equalTailed({ a, b }: Marginal, credibility: number): Interval {
  const tail = (1 - credibility) / 2;
  return { lower: betaQuantile(tail, a, b), upper: betaQuantileUpper(tail, a, b) };
}

/** `[0, q]` with `q` the one-sided limit: what a share without events shows. */
export function upperLimit({ a, b }: Marginal, credibility: number): Interval {
  return { lower: 0, upper: betaQuantileUpper(1 - credibility, a, b) };
}

/** `[q, 1]`: what a share shows that no event missed. */
export function lowerLimit({ a, b }: Marginal, credibility: number): Interval {
  return { lower: betaQuantile(1 - credibility, a, b), upper: 1 };
}

/**
 * Interval of one cell of a column. A cell with no events shows an upper limit, whatever the kind: never a lower bound
 * above zero (statistics.md 4).
 */
export function cellInterval(marginal: Marginal, events: number, credibility: number, kind: IntervalKind): Interval {
  if (events === 0) return upperLimit(marginal, credibility);
  return kind === 'shortest'
    ? shortestInterval(credibility, marginal.a, marginal.b)
    : equalTailed(marginal, credibility);
}

/**
 * Interval of a sum of outcomes of a column with `inside` events in it and `outside` events elsewhere. One-sided where
 * events are all on one side, so that the interval of a share and of what is left of it are each other's complement.
 */
export function shareInterval(marginal: Marginal, inside: number, outside: number, credibility: number): Interval {
  if (inside === 0) return upperLimit(marginal, credibility);
  return outside === 0 ? lowerLimit(marginal, credibility) : equalTailed(marginal, credibility);
}
