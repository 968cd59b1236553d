import { binomialVariate } from './binomial-variate';
import type { RandomStream } from './random';

/**
 * Fills `out` with a multinomial variate: `trials` shared out with probabilities proportional to `weights` (finite, none
 * negative, of `out`'s length). Cells of weight 0 get nothing.
 * Throws `RangeError` where there are trials but no weight.
 */
export function multinomialInto(stream: RandomStream, trials: number, weights: Float64Array, out: Float64Array): void {
  const conditionals = conditionalsOf(weights);
  if (trials > 0 && !conditionals.includes(1)) throw new RangeError('trials to share out, but every weight is 0');
  shareOut(stream, trials, conditionals, out);
}

/**
 * Probability of each cell given that no cell before it was hit. The last cell of any weight has 1: rounding cannot lose a
 * trial. All 0 where every weight is. Written into `conditionals` where it is given.
 */
export function conditionalsOf(
  weights: Float64Array,
  conditionals: Float64Array = new Float64Array(weights.length),
): Float64Array {
  let rest = 0;
  for (let i = weights.length - 1; i >= 0; i--) {
    rest += weights[i]!;
    conditionals[i] = weights[i]! > 0 ? weights[i]! / rest : 0;
  }
  return conditionals;
}

/** `multinomialInto` for weights given by their `conditionalsOf`: one binomial a cell until no trial is left. */
export function shareOut(stream: RandomStream, trials: number, conditionals: Float64Array, out: Float64Array): void {
  let left = trials;
  for (let i = 0; i < conditionals.length; i++) {
    const hits = left > 0 && conditionals[i]! > 0 ? binomialVariate(stream, left, conditionals[i]!) : 0;
    out[i] = hits;
    left -= hits;
  }
}
