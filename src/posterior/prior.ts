import type { Axis } from '../study/axis';
import type { Prior } from '../study/study';
import { shapeOf, type Tally } from '../tally/tally';
import { neighbourPrior, type NeighbourPrior } from './neighbours';

/** Pseudo-counts of the prior, `[columns, outcomes]`. */
export interface PriorCounts {
  columns: number;
  outcomes: number;
  counts: Float64Array;
}

/**
 * The prior of every column as the study asks for it: `pseudoCount`, `pseudoTotal`, or the neighbour prior, and in
 * `neighbours` how the strength of that one was found (`null` for the others).
 */
export function priorOf(
  prior: Prior,
  tally: Tally,
  trueAxis: Axis,
  recoAxis: Axis,
): PriorCounts & { neighbours: NeighbourPrior | null } {
  if (!('neighbours' in prior)) return { ...evenPrior(prior, tally), neighbours: null };
  const neighbours = neighbourPrior(tally, trueAxis, recoAxis);
  return { ...shapeOf(tally), counts: neighbours.counts, neighbours };
}

/** The same prior for every column: `c` for each outcome, or a fixed total shared out, `T / O` (Perks with `T = 1`). */
export function evenPrior(prior: Exclude<Prior, { neighbours: object }>, tally: Tally): PriorCounts {
  const { columns, outcomes } = shapeOf(tally);
  const each = 'pseudoCount' in prior ? prior.pseudoCount : prior.pseudoTotal / outcomes;
  return { columns, outcomes, counts: new Float64Array(columns * outcomes).fill(each) };
}
