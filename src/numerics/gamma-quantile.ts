import { logGamma, logPoisson } from './stirling';

/** Relative change at which series and continued fraction have said what a double can hold. */
const SETTLED = 1e-15;
/** Far above what the largest shape needs: a series that has not ended by then is a defect, and is told. */
const MOST_TERMS = 10_000_000;
const MOST_STEPS = 200;
/** Steps of Newton's method square their error: one this small is the last, and well above the rounding of the tails. */
const LAST_STEP = 1e-9;
/** Of the logarithm of the quantile: where the tail bends, a longer step would leave the range of a double. */
const LONGEST_STEP = 2;
/** Keeps Lentz's method from dividing by zero. */
const TINY = 1e-300;

/**
 * The `x` with `P(X <= x) = p` of a Gamma variate of shape `a` and scale 1; relative error below 1e-10 for shapes from 0.1 to
 * 1e7 and both tails down to 1e-12. A shape of 0 is certainty of 0. Throws `RangeError` for a shape that is negative or not
 * finite, and for a `p` outside (0, 1). Sources: Wilson & Hilferty, PNAS 17 (1931) 684, for the start; incomplete gamma
 * function by DLMF 8.7.1 (series) and 8.9.2 (continued fraction).
 */
export function gammaQuantile(p: number, a: number): number {
  if (!(a >= 0 && a < Infinity)) throw new RangeError(`a Gamma shape must be at least 0 and finite, not ${a}`);
  if (!(p > 0 && p < 1)) throw new RangeError(`a probability must be inside (0, 1), not ${p}`);
  if (a === 0) return 0;
  let [low, high] = [0, Infinity];
  let x = start(p, a);
  for (let step = 0; step < MOST_STEPS; step++) {
    const { lower, upper, slope } = gammaTails(x, a);
    // Newton's method on the logarithm of the smaller tail, which is nearly straight however far out.
    const ahead = p < 0.5 ? Math.log(lower / p) * lower : Math.log((1 - p) / upper) * upper;
    if (ahead > 0) high = x;
    else low = x;
    const change = Math.max(-LONGEST_STEP, Math.min(LONGEST_STEP, -ahead / slope));
    if (Math.abs(change) <= LAST_STEP) return x * (1 + change);
    x = inside(x * Math.exp(change), low, high);
  }
  return x;
}

/** `P(X <= x)`, `P(X > x)` and `x` times the density, for `x > 0` and `a > 0`. */
export function gammaTails(x: number, a: number): { lower: number; upper: number; slope: number } {
  const slope = a * Math.exp(logPoisson(a, x));
  if (x < a + 1) {
    const lower = (slope / a) * series(x, a);
    return { lower, upper: 1 - lower, slope };
  }
  const upper = slope * fraction(x, a);
  return { lower: 1 - upper, upper, slope };
}

function start(p: number, a: number): number {
  if (a < 1) return Math.min(1, Math.exp((Math.log(p) + logGamma(a + 1)) / a)) || TINY;
  const third = 1 / (9 * a);
  const cube = 1 - third + normalStart(p) * Math.sqrt(third);
  return cube > 0 ? a * cube ** 3 : a * Math.exp((Math.log(p) + logGamma(a + 1) - a * Math.log(a)) / a);
}

/** A normal quantile good to about 5e-4 (Hastings 1955, sheet 68; memory): only where the steps begin. */
function normalStart(p: number): number {
  const t = Math.sqrt(-2 * Math.log(Math.min(p, 1 - p)));
  const z = t - (2.515517 + t * (0.802853 + t * 0.010328)) / (1 + t * (1.432788 + t * (0.189269 + t * 0.001308)));
  return p < 0.5 ? -z : z;
}

function inside(x: number, low: number, high: number): number {
  if (x > low && x < high) return x;
  return high === Infinity ? 2 * low : (low + high) / 2;
}

function series(x: number, a: number): number {
  let sum = 1;
  for (let n = 1, term = 1; n < MOST_TERMS; n++) {
    term *= x / (a + n);
    sum += term;
    if (term < sum * SETTLED) return sum;
  }
  throw new RangeError(`the series of the incomplete gamma function did not end at shape ${a}, ${x}`);
}

/** `1 / (x + 1 - a - 1 (1 - a) / (x + 3 - a - ...))` by Lentz's method. */
function fraction(x: number, a: number): number {
  let b = x + 1 - a;
  let c = 1 / TINY;
  let d = 1 / b;
  let value = d;
  for (let n = 1; n < MOST_TERMS; n++) {
    const numerator = -n * (n - a);
    b += 2;
    d = 1 / (numerator * d + b || TINY);
    c = b + numerator / c || TINY;
    const factor = c * d;
    value *= factor;
    if (Math.abs(factor - 1) < SETTLED) return value;
  }
  throw new RangeError(`the fraction of the incomplete gamma function did not end at shape ${a}, ${x}`);
}
