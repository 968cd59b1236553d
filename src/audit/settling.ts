import { normalCdf, normalQuantile } from '../numerics/normal';

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
