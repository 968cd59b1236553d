import type { RandomStream } from './random';
import { logPoisson } from './stirling';

/** From this mean on the transformed rejection is valid (its author's limit); below it, uniform numbers are multiplied. */
export const TRANSFORMED_FROM = 10;

/**
 * A Poisson variate of the given mean. Throws `RangeError` unless `0 <= mean <= 2^52`, beyond which integers have gaps.
 * Sources: Knuth, *The Art of Computer Programming* 2, 3.4.1; from mean 10 on algorithm PTRS of Hormann, "The transformed
 * rejection method for generating Poisson random variables", Insurance: Mathematics and Economics 12 (1993) 39.
 */
export function poissonVariate(stream: RandomStream, mean: number): number {
  if (!(mean >= 0 && mean <= 2 ** 52)) throw new RangeError(`a Poisson mean must be from 0 to 2^52, not ${mean}`);
  return mean < TRANSFORMED_FROM ? byProduct(stream, mean) : byTransformedRejection(stream, mean);
}

function byProduct(stream: RandomStream, mean: number): number {
  const least = Math.exp(-mean);
  let count = 0;
  for (let product = stream.uniform(); product > least; product *= stream.uniform()) count++;
  return count;
}

/** The constants are the paper's. */
function byTransformedRejection(stream: RandomStream, mean: number): number {
  const b = 0.931 + 2.53 * Math.sqrt(mean);
  const a = -0.059 + 0.02483 * b;
  const inverseAlpha = 1.1239 + 1.1328 / (b - 3.4);
  const certain = 0.9277 - 3.6224 / (b - 2);
  for (;;) {
    const u = stream.uniform() - 0.5;
    const v = stream.uniform();
    const us = 0.5 - Math.abs(u);
    const k = Math.floor(((2 * a) / us + b) * u + mean + 0.43);
    if (us >= 0.07 && v <= certain) return k;
    if (k < 0 || (us < 0.013 && v > us)) continue;
    if (Math.log((v * inverseAlpha) / (a / (us * us) + b)) <= logPoisson(k, mean)) return k;
  }
}
