import { shareInterval } from '../posterior/intervals';
import { marginalOf, momentsOf, type Marginal } from '../posterior/marginal';
import { hasNoPosterior } from '../posterior/posterior';
import { columnEvents, type AuditInput } from './audit-input';
import type { Reading } from './measure';

/** What is known of the summed probability of some outcomes of one column. */
export interface ColumnShare {
  marginal: Marginal;
  mean: number;
  lower: number;
  upper: number;
  /** Events of the column among the chosen outcomes, and in all. */
  inside: number;
  events: number;
  /** How much one more event adds to the total `a + b` of the marginal: 1 for unit weights. */
  growth: number;
}

export const NO_POSTERIOR = 'no events and a prior of zero';

/** The share of `chosen` outcomes in each column; `null` for a column without posterior. */
export function columnShares(input: AuditInput, chosen: readonly number[]): (ColumnShare | null)[] {
  const events = columnEvents(input);
  return input.tally.columnNames.map((_, j) => {
    if (hasNoPosterior(input.posterior, j)) return null;
    const { outcomes } = input.posterior;
    const inside = chosen.reduce((sum, k) => sum + input.tally.cells.events[j * outcomes + k]!, 0);
    const marginal = marginalOf(input.posterior, j, chosen);
    const interval = shareInterval(marginal, inside, events[j]! - inside, input.study.credibility);
    const growth = growthOf(input, j, marginal, events[j]!);
    return { marginal, mean: momentsOf(marginal).mean, ...interval, inside, events: events[j]!, growth };
  });
}

export function readingOf(share: ColumnShare | null): Reading {
  return share ? { value: share.mean, lower: share.lower, upper: share.upper } : { reason: NO_POSTERIOR };
}

function growthOf({ posterior }: AuditInput, j: number, { a, b }: Marginal, events: number): number {
  if (events === 0) return 1;
  const { outcomes } = posterior;
  const prior = posterior.prior.subarray(j * outcomes, (j + 1) * outcomes).reduce((sum, c) => sum + c, 0);
  const grown = (a + b - prior) / events;
  // Weights so unequal that the events add less than the prior's own counts: effective entries are the fair measure.
  return grown > 0 ? grown : posterior.effective[j]! / events;
}
