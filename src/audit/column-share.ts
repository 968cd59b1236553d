import { shareInterval } from '../posterior/intervals';
import { conditionalMarginal, momentsOf, type Marginal } from '../posterior/marginal';
import type { AuditInput } from './audit-input';
import type { Reading } from './measure';

/** What is known of the summed probability of some outcomes of one column. */
export interface ColumnShare {
  marginal: Marginal;
  mean: number;
  lower: number;
  upper: number;
  /** Events of the column in the chosen outcomes, and in those they are a share of. */
  inside: number;
  events: number;
  /** How much one more event of the column adds to the total `a + b` of the marginal: 1 for unit weights. */
  growth: number;
}

export const NO_POSTERIOR = 'no events and a prior of zero';

/**
 * The share of `chosen` outcomes in each column, of all outcomes or of those `among` alone; `null` for a column without
 * posterior there.
 */
export function columnShares(
  input: AuditInput,
  chosen: readonly number[],
  among: readonly number[] = [...input.tally.outcomeNames.keys()],
): (ColumnShare | null)[] {
  return input.tally.columnNames.map((_, j) => columnShare(input, j, chosen, among));
}

/** As `columnShares`, of column `j` alone. */
export function columnShare(
  input: AuditInput,
  j: number,
  chosen: readonly number[],
  among: readonly number[],
): ColumnShare | null {
  const marginal = conditionalMarginal(input.posterior, j, chosen, among);
  if (!marginal) return null;
  const column = input.tally.cells.events.subarray(j * input.posterior.outcomes, (j + 1) * input.posterior.outcomes);
  const inside = chosen.reduce((sum, k) => sum + column[k]!, 0);
  const events = among.reduce((sum, k) => sum + column[k]!, 0);
  const interval = shareInterval(marginal, inside, events - inside, input.study.credibility);
  const growth = growthOf(input, j, marginal, among);
  return { marginal, mean: momentsOf(marginal).mean, ...interval, inside, events, growth };
}

export function readingOf(share: ColumnShare | null): Reading {
  return share ? { value: share.mean, lower: share.lower, upper: share.upper } : { reason: NO_POSTERIOR };
}

function growthOf({ posterior, tally }: AuditInput, j: number, { a, b }: Marginal, among: readonly number[]): number {
  const from = j * posterior.outcomes;
  const all = tally.cells.events.subarray(from, from + posterior.outcomes).reduce((sum, n) => sum + n, 0);
  if (all === 0) return 1;
  const prior = among.reduce((sum, k) => sum + posterior.prior[from + k]!, 0);
  const grown = (a + b - prior) / all;
  // Weights so unequal that the events add less than the prior's own counts: effective entries are the fair measure.
  return grown > 0 ? grown : posterior.effective[j]! / all;
}
