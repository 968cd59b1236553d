import { betaQuantile, betaQuantileUpper } from './beta';
import { logKernel } from './beta-tails';

export interface ShortestInterval {
  lower: number;
  upper: number;
}

/**
 * The shortest interval that holds the probability `credibility` (inside (0, 1)) of `Beta(a, b)`. For two shapes above 1 it is the one
 * of highest density, with equal density at both ends. A density that falls (`a <= 1 <= b`) gives `[0, q]`, one that rises
 * (`b <= 1 <= a`) gives `[q, 1]`. Of a density that rises to both ends (`a, b < 1`) it is the shorter of those two, `[0, q]` where they
 * are equal: the region of highest density would be in two pieces. The uniform density, all of whose intervals are equal, gives the
 * middle one; a shape of 0 its end. Throws `RangeError` as `betaQuantile` does.
 */
export function shortestInterval(credibility: number, a: number, b: number): ShortestInterval {
  if (!(credibility > 0 && credibility < 1))
    throw new RangeError(`a credibility must be inside (0, 1), not ${credibility}`);
  const left = 1 - credibility;
  if (a > 1 && b > 1) return ofPeak(left, a, b);
  if (a === 1 && b === 1) return { lower: left / 2, upper: 1 - left / 2 };
  const fromZero = { lower: 0, upper: betaQuantileUpper(left, a, b) };
  const toOne = { lower: betaQuantile(left, a, b), upper: 1 };
  if (b === 0) return { lower: 1, upper: 1 };
  if (a <= 1 && b >= 1) return fromZero;
  if (a >= 1) return toOne;
  return fromZero.upper <= 1 - toOne.lower ? fromZero : toOne;
}

/** The probability below the interval over that above it, as a logarithm, is sought between these: beyond them it is an end of [0, 1]. */
const MOST_LOG_ODDS = 600;

/** A step of Newton's method in those odds that no longer moves an end by 1e-9 of the interval. */
const LAST_STEP = 1e-9;

/** Newton's method, kept in a bracket, on the difference of the log densities at the two ends, which rises with the odds. */
function ofPeak(left: number, a: number, b: number): ShortestInterval {
  let [least, most, odds] = [-MOST_LOG_ODDS, MOST_LOG_ODDS, 0];
  for (;;) {
    const below = left / (1 + Math.exp(-odds));
    const lower = betaQuantile(below, a, b);
    const upper = betaQuantileUpper(left - below, a, b);
    const [low, high] = [logDensity(lower, a, b), logDensity(upper, a, b)];
    if (low.value < high.value) least = odds;
    else most = odds;
    const moved = (below * (left - below)) / left;
    const slope = (moved * low.slope) / Math.exp(low.value) - (moved * high.slope) / Math.exp(high.value);
    const newton = odds - (low.value - high.value) / slope;
    const next = newton > least && newton < most ? newton : (least + most) / 2;
    if (Math.abs(next - odds) <= LAST_STEP) return { lower, upper };
    odds = next;
  }
}

/** `ln f(x)` and its slope in `x`. */
function logDensity(x: number, a: number, b: number): { value: number; slope: number } {
  const y = 1 - x;
  return { value: logKernel(x, y, a, b) - Math.log(x) - Math.log(y), slope: (a - 1) / x - (b - 1) / y };
}
