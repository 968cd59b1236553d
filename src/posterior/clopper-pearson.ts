import { betaQuantile, betaQuantileUpper } from '../numerics/beta';
import type { Interval } from './intervals';

/**
 * The frequentist interval of a proportion, `events` out of `trials`, that covers with at least `confidence` (Clopper &
 * Pearson, Biometrika 26 (1934) 404): the cross-check of a credible interval. Both ends are quantiles of a Beta.
 */
export function clopperPearson(events: number, trials: number, confidence: number): Interval {
  const tail = (1 - confidence) / 2;
  return {
    lower: events === 0 ? 0 : betaQuantile(tail, events, trials - events + 1),
    upper: events === trials ? 1 : betaQuantileUpper(tail, events + 1, trials - events),
  };
}
