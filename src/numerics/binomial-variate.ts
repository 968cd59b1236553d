import type { RandomStream } from './random';
import { stirlingError } from './stirling';

/** Expected successes from which rejection beats counting: the method's own bound, below it its hat does not cover. */
export const LEAST_EXPECTED_FOR_REJECTION = 10;

/**
 * A binomial variate: successes among `trials` (an integer from 0 to 2^53) of probability `p`, which is taken as 0 or 1
 * where rounding has carried it past them. Exact for every size.
 * Source: Hormann, "The generation of binomial random variates", J. Stat. Comput. Simul. 46 (1993) 101, algorithm BTRS
 * (from memory); counting along the distribution function where few successes are expected.
 */
export function binomialVariate(stream: RandomStream, trials: number, p: number): number {
  if (p > 0.5) return trials - binomialVariate(stream, trials, 1 - p);
  if (trials === 0 || !(p > 0)) return 0;
  return trials * p < LEAST_EXPECTED_FOR_REJECTION ? byCounting(stream, trials, p) : byRejection(stream, trials, p);
}

function byCounting(stream: RandomStream, trials: number, p: number): number {
  const odds = p / (1 - p);
  for (;;) {
    let left = stream.uniform();
    let mass = Math.exp(trials * Math.log1p(-p));
    // The masses sum to one but for rounding: a uniform number beyond their sum is drawn again.
    for (let k = 0; k <= trials && mass > 0; k++) {
      if (left <= mass) return k;
      left -= mass;
      mass *= (odds * (trials - k)) / (k + 1);
    }
  }
}

function byRejection(stream: RandomStream, trials: number, p: number): number {
  const sd = Math.sqrt(trials * p * (1 - p));
  const b = 1.15 + 2.53 * sd;
  const a = -0.0873 + 0.0248 * b + 0.01 * p;
  const squeeze = 0.92 - 4.2 / b;
  const alpha = (2.83 + 5.1 / b) * sd;
  for (;;) {
    const u = stream.uniform() - 0.5;
    const v = stream.uniform();
    const room = 0.5 - Math.abs(u);
    const k = Math.floor(((2 * a) / room + b) * u + trials * p + 0.5);
    if (room >= 0.07 && v <= squeeze) return k;
    if (k < 0 || k > trials) continue;
    if (Math.log((v * alpha) / (a / (room * room) + b)) <= logRatioToMode(trials, p, k)) return k;
  }
}

/** `ln(P(k) / P(mode))` of a binomial, by Stirling's formula with its error. */
function logRatioToMode(trials: number, p: number, k: number): number {
  const mode = Math.floor((trials + 1) * p);
  const odds = p / (1 - p);
  return (
    (mode + 0.5) * Math.log((mode + 1) / (odds * (trials - mode + 1))) +
    (trials + 1) * Math.log1p((k - mode) / (trials - k + 1)) +
    (k + 0.5) * Math.log((odds * (trials - k + 1)) / (k + 1)) +
    stirlingError(mode + 1) +
    stirlingError(trials - mode + 1) -
    stirlingError(k + 1) -
    stirlingError(trials - k + 1)
  );
}
