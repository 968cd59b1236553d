import type { Prior } from '../study/study';
import type { Tally } from '../tally/tally';
import { shapeOf } from '../tally/tally';

/** Pseudo-counts of the prior, `[columns, outcomes]`. */
export interface PriorCounts {
  columns: number;
  outcomes: number;
  counts: Float64Array;
}

/**
 * The prior of every column: `c` for each outcome, or a fixed total shared out, `T / O` (Perks with `T = 1`).
 * The neighbour prior stands in `neighbours.ts`.
 */
export function evenPrior(prior: Exclude<Prior, { neighbours: object }>, tally: Tally): PriorCounts {
  const { columns, outcomes } = shapeOf(tally);
  const each = 'pseudoCount' in prior ? prior.pseudoCount : prior.pseudoTotal / outcomes;
  return { columns, outcomes, counts: new Float64Array(columns * outcomes).fill(each) };
}
