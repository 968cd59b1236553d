import { betaCdf } from '../numerics/beta';
import { normalQuantile } from '../numerics/normal';
import type { Marginal } from '../posterior/marginal';
import { answer, type FlagState } from './flag';
import { ASSURANCE, leastGrowth } from './settling';

/** On which side of its limit a share is beyond it. */
export type Side = 'above' | 'below';

/** Posterior probability that a share lies beyond a limit. */
export function probabilityBeyond({ a, b }: Marginal, limit: number, side: Side): number {
  if (side === 'below') return limit >= 1 ? Number(b > 0) : betaCdf(limit, a, b);
  return limit <= 0 ? Number(a > 0) : betaCdf(1 - limit, b, a);
}

/** More events in one column than any campaign takes: a limit that needs them is as good as not to be settled. */
export const MOST_EVENTS = 1e9;

/** Standard deviations of the fluctuation that as many campaigns as `ASSURANCE` says do not exceed. */
const UNLUCKY = normalQuantile(ASSURANCE);

export interface Settlement {
  /** Events to add to the column. */
  events: number;
  as: Exclude<FlagState, 'undecided'>;
}

/**
 * Events to add so that an undecided limit is settled, if the share stays at its present mean: the total `a + b` grows
 * by `growth` an event, the mean stays but for an unlucky fluctuation that 19 of 20 campaigns do not exceed. It settles
 * on the side where the mean lies. `null` where more than `MOST_EVENTS` are needed: the mean is too close to the limit.
 */
export function eventsToSettle(
  marginal: Marginal,
  limit: number,
  side: Side,
  credibility: number,
  growth: number,
): Settlement | null {
  const mean = marginal.a / (marginal.a + marginal.b);
  const isBeyond = side === 'above' ? mean > limit : mean < limit;
  const as = isBeyond ? 'flagged' : 'clear';
  const unlucky = isBeyond === (side === 'above') ? -1 : 1;
  const settles = (events: number): boolean => {
    const later = grown(marginal, events * growth, unlucky);
    return answer(probabilityBeyond(later, limit, side), credibility) === as;
  };
  const events = leastEvents(settles);
  return events === null ? null : { events, as };
}

/** Events that would clear a limit if none of them were beyond it: what an empty column needs at the least. */
export function eventsToClear(
  marginal: Marginal,
  limit: number,
  side: Side,
  credibility: number,
  growth: number,
): number | null {
  return leastEvents((events) => {
    const added = events * growth;
    const later = side === 'above' ? { ...marginal, b: marginal.b + added } : { ...marginal, a: marginal.a + added };
    return answer(probabilityBeyond(later, limit, side), credibility) === 'clear';
  });
}

/** The marginal after `added` to its total, the share of it in `a` off by an unlucky fluctuation towards `sign`. */
function grown({ a, b, method }: Marginal, added: number, sign: number): Marginal {
  const mean = a / (a + b);
  const expected = added * mean + sign * UNLUCKY * Math.sqrt(added * mean * (1 - mean));
  const inside = Math.min(added, Math.max(0, expected));
  return { a: a + inside, b: b + added - inside, method };
}

function leastEvents(settles: (events: number) => boolean): number | null {
  const events = leastGrowth(settles, MOST_EVENTS);
  return events && Math.ceil(events);
}
