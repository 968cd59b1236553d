import betaincinv from '@stdlib/math-base-special-betaincinv';
import { betaTails, kernelOverTail, logKernel, type Tails } from './beta-tails';

/**
 * Below this tail @stdlib's quantile fails here and there (at shapes 2.5 and 10 it is wrong from 1e-100 on); above it no fault
 * was found in 1.5 million random shapes from 1e-3 to 1e7.
 */
export const FAR_TAIL = 1e-20;

/** With a smaller shape less than 1e-9 of the probability is elsewhere than at 0 and 1: the quantile is the end itself. */
const LEAST_SHAPE = 1e-12;

/** Below this shape @stdlib's quantile needs no polish, and a tail beside the mode can be small and not well known. */
const POLISHED_FROM = 1;

/**
 * `P(X <= x)` of `Beta(a, b)`. A shape of 0 leaves all at one end: `a = 0` at 0, `b = 0` at 1. Relative error as of `betaTails`.
 * Throws `RangeError` for shapes that are negative, not finite, or both 0, and for an `x` that is no number.
 */
export function betaCdf(x: number, a: number, b: number): number {
  return tailsAt(x, a, b).lower;
}

/** `P(X > x)` of `Beta(a, b)`, as precise where it is small. Otherwise as `betaCdf`. */
export function betaCdfUpper(x: number, a: number, b: number): number {
  return tailsAt(x, a, b).upper;
}

function tailsAt(x: number, a: number, b: number): Tails {
  checkShapes(a, b);
  if (Number.isNaN(x)) throw new RangeError('a Beta variate cannot be NaN');
  const certain = a === 0 ? 0 : b === 0 ? 1 : null;
  if (certain !== null) return x >= certain ? { lower: 1, upper: 0 } : { lower: 0, upper: 1 };
  if (x <= 0) return { lower: 0, upper: 1 };
  if (x >= 1) return { lower: 1, upper: 0 };
  return betaTails(x, 1 - x, a, b);
}

/**
 * The `x` with `P(X <= x) = p` of `Beta(a, b)`: relative error below 1e-10 for shapes from 1e-3 to 1e7 and `p` down to 1e-300.
 * Quantiles below the least double are 0. A shape of 0 gives its end: `a = 0` gives 0, `b = 0` gives 1.
 * Throws `RangeError` for shapes that are negative, not finite, or both 0, and for a `p` outside [0, 1].
 */
export function betaQuantile(p: number, a: number, b: number): number {
  return atEnd(p, 0, a, b) ?? (p < FAR_TAIL ? logistic(farLogit(p, a, b)) : quantile('lower', p, a, b));
}

/** The `x` with `P(X > x) = q` of `Beta(a, b)`, for a `q` that `1 - q` would lose. Otherwise as `betaQuantile`. */
export function betaQuantileUpper(q: number, a: number, b: number): number {
  return atEnd(q, 1, a, b) ?? (q < FAR_TAIL ? logistic(-farLogit(q, b, a)) : quantile('upper', q, a, b));
}

/**
 * @stdlib's quantile. It stops up to 4e-10 short at large integer shapes: from `POLISHED_FROM` on a step of Newton's method follows.
 */
function quantile(side: keyof Tails, tail: number, a: number, b: number): number {
  const x = betaincinv(tail, a, b, side === 'upper');
  if (a < POLISHED_FROM || b < POLISHED_FROM || x === 0 || x === 1) return x;
  const tails = betaTails(x, 1 - x, a, b);
  const excess = side === 'lower' ? tails.lower - tail : tail - tails.upper;
  return x - (x * (1 - x) * excess) / tails.kernel;
}

/** The quantile where it needs no computing: `near` is the end at which a tail of 0 lies. */
function atEnd(tail: number, near: 0 | 1, a: number, b: number): number | null {
  checkShapes(a, b);
  if (!(tail >= 0 && tail <= 1)) throw new RangeError(`a probability must be from 0 to 1, not ${tail}`);
  if (a === 0) return 0;
  if (b === 0) return 1;
  if (tail === 0) return near;
  if (tail === 1) return 1 - near;
  if (a >= LEAST_SHAPE && b >= LEAST_SHAPE) return null;
  return tail <= (near === 0 ? b : a) / (a + b) ? near : 1 - near;
}

function checkShapes(a: number, b: number): void {
  if (a >= 0 && b >= 0 && a + b > 0 && a + b < Infinity) return;
  throw new RangeError(`Beta shapes must be at least 0, finite, and one above 0, not ${a}, ${b}`);
}

function logistic(logit: number): number {
  return 1 / (1 + Math.exp(-logit));
}

/** Quantiles below the least normal double are given as 0. */
const LEAST_LOGIT = -1022 * Math.LN2;

/** Newton's last step is at most this; its error is then of the order of the step's square. */
const LAST_STEP = 1e-9;

/**
 * `ln(x / (1 - x))` of the quantile of a far lower tail, by Newton's method on `ln I_x`. That function is increasing and concave in
 * the logit, so that the method cannot miss: from below the root it climbs to it, from above it first falls below.
 */
function farLogit(p: number, a: number, b: number): number {
  const log = Math.log(p);
  let logit = firstLogit(log, a, b);
  while (logit > -Infinity) {
    const x = logistic(logit);
    const y = logistic(-logit);
    const slope = kernelOverTail(x, y, a, b);
    const next = Math.max(LEAST_LOGIT, logit + (log - logKernel(x, y, a, b) + Math.log(slope)) / slope);
    if (Math.abs(next - logit) <= LAST_STEP) return next;
    logit = next;
  }
  return logit;
}

/** From `I_x ~ x^a / (a B(a, b))` at small x, else from the mean. */
function firstLogit(log: number, a: number, b: number): number {
  const logBeta = -(a + b) * Math.LN2 - logKernel(0.5, 0.5, a, b);
  const logX = (log + Math.log(a) + logBeta) / a;
  if (logX < LEAST_LOGIT) return -Infinity;
  return logX < 0 ? logX - Math.log(-Math.expm1(logX)) : Math.log(a / b);
}
