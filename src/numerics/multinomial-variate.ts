import { binomialVariate } from './binomial-variate';
import type { RandomStream } from './random';

/**
 * Fills `out` with a multinomial variate: `trials` shared out with probabilities proportional to `weights` (finite, none
 * negative, of `out`'s length). Cells of weight 0 get nothing. By conditional binomials, cell after cell.
 * Throws `RangeError` where there are trials but no weight.
 */
export function multinomialInto(stream: RandomStream, trials: number, weights: Float64Array, out: Float64Array): void {
  let last = weights.length - 1;
  while (last >= 0 && !(weights[last]! > 0)) last--;
  if (last < 0 && trials > 0) throw new RangeError('trials to share out, but every weight is 0');
  let weight = 0;
  for (let i = 0; i <= last; i++) weight += weights[i]!;
  let left = trials;
  out.fill(0);
  for (let i = 0; i < last && left > 0; i++) {
    if (!(weights[i]! > 0)) continue;
    out[i] = binomialVariate(stream, left, weights[i]! / weight);
    left -= out[i]!;
    weight -= weights[i]!;
  }
  // The rest goes to the last cell that can have it: rounding in `weight` cannot lose a trial.
  if (last >= 0) out[last] = left;
}
