import { betaCdf } from '../numerics/beta';
import { normalCdf, normalQuantile } from '../numerics/normal';
import type { Marginal } from '../posterior/marginal';

/** How surely the events that are asked for shall settle a limit, whichever way. */
export const ASSURANCE = 0.95;

/** Growth of a campaign beyond which a limit counts as not to be settled: the measure is too close to it. */
export const MOST_GROWTH = 1e7;

/** Bisection ends when the growth is known to this part. */
const PRECISION = 1e-3;

/**
 * How many times as many events settle the limit of a measure whose posterior is near normal with `mean` and `sd`: the
 * least growth for which, by the posterior itself, the answer is `flagged` or `clear` with probability `ASSURANCE`. After growth `g`
 * the sd is `sd / sqrt(g)` and the new mean is normal about the present one with variance `sd^2 (1 - 1/g)`.
 * At least 1; `null` beyond `MOST_GROWTH`.
 */
export function growthToSettle(mean: number, sd: number, limit: number, credibility: number): number | null {
  const reach = normalQuantile(credibility);
  const offset = Math.abs(mean - limit) / sd;
  return leastGrowth((growth) => {
    const later = 1 / Math.sqrt(growth);
    const spread = Math.sqrt(1 - 1 / growth);
    if (spread === 0) return offset >= reach;
    const unsettled = normalCdf((reach * later - offset) / spread) - normalCdf((-reach * later - offset) / spread);
    return 1 - unsettled >= ASSURANCE;
  }, MOST_GROWTH);
}

/** The least number from 1 up to `most` from which `settles` holds, by doubling and bisection; `null` where none is found. */
export function leastGrowth(settles: (growth: number) => boolean, most: number): number | null {
  if (settles(1)) return 1;
  let high = 2;
  while (!settles(high)) {
    if (high >= most) return null;
    high = Math.min(most, 2 * high);
  }
  let low = high / 2;
  while (high - low > PRECISION * high) {
    const middle = (low + high) / 2;
    if (settles(middle)) high = middle;
    else low = middle;
  }
  return high;
}

/** Entries beyond which the limit of a share counts as not to be settled. */
export const MOST_ENTRIES = 1e10;

/**
 * Entries to add so that the limit of a share is settled, whichever way, with probability `ASSURANCE` under the posterior
 * itself: the share need not stay where its mean is now, and often will not. Hits among `n` more entries are Beta-binomial; their
 * distribution is taken as a Beta of the same mean and variance with continuity correction (within 0.025, for few entries). `null` beyond `MOST_ENTRIES`.
 */
export function entriesToSettle(marginal: Marginal, limit: number, credibility: number): number | null {
  const growth = leastGrowth(
    (entries) => settledShare(marginal, limit, credibility, Math.ceil(entries)) >= ASSURANCE,
    MOST_ENTRIES,
  );
  return growth && Math.ceil(growth);
}

/** Probability under the posterior that `entries` more leave the limit answered `flagged` or `clear`. */
export function settledShare({ a, b }: Marginal, limit: number, credibility: number, entries: number): number {
  if (limit <= 0 || limit >= 1 || a === 0 || b === 0) return 1;
  const below = (hits: number): number => betaCdf(limit, a + hits, b + entries - hits);
  // `below` falls with every hit: the undecided numbers of hits stand together.
  const first = firstHits((hits) => below(hits) < credibility, entries);
  const end = firstHits((hits) => below(hits) <= 1 - credibility, entries);
  if (first >= end) return 1;
  const hits = hitsCdf(a, b, entries);
  return 1 - (hits(end - 1) - hits(first - 1));
}

/** The least number of hits from 0 to `entries` for which `holds`, which once true stays so; `entries + 1` where none is. */
function firstHits(holds: (hits: number) => boolean, entries: number): number {
  let low = 0;
  let high = entries + 1;
  while (low < high) {
    const middle = Math.floor((low + high) / 2);
    if (holds(middle)) high = middle;
    else low = middle + 1;
  }
  return low;
}

/** Distribution function of the hits among `entries` whose probability is `Beta(a, b)`. */
function hitsCdf(a: number, b: number, entries: number): (hits: number) => number {
  const total = a + b;
  // Variance of hits / entries is m (1 - m) (total + entries) / (entries (total + 1)): that of a Beta of this total.
  const matched = Math.max(((total + 1) * entries) / (total + entries) - 1, Number.EPSILON);
  return (hits) => {
    const share = (hits + 0.5) / entries;
    if (share <= 0 || share >= 1) return share <= 0 ? 0 : 1;
    return betaCdf(share, (matched * a) / total, (matched * b) / total);
  };
}
