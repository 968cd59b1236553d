import { exp, log } from './exp-log';
import type { RandomStream } from './random';
import { fillNormals, type Room } from './ziggurat';

/** `U^(1/a)` of the boost is `exp(-E/a)` with `E` exponential; below this shape `E/a` could overflow. */
export const SMALLEST_SHAPE = 1e-300;

/** Where the quick test of the rejection holds: `|t| <= 1/2`. */
const SQUARE_LIMIT = 0.25;

/**
 * A gamma variate of the given shape and scale 1; shape 0 gives 0. Shape 1/2 is half a squared normal, shape 1 an
 * exponential, and below 1 it is the variate of `shape + 1` times `U^(1/shape)`. Nothing is approximated at large shapes.
 * Below a shape of about 0.01 the variate may underflow to 0: `logGammaVariate` does not.
 * Throws `RangeError` for a shape that is negative, not finite, or between 0 and `SMALLEST_SHAPE`.
 * Source: Marsaglia & Tsang, "A simple method for generating gamma variables", ACM TOMS 26 (2000) 363.
 */
export function gammaVariate(stream: RandomStream, shape: number): number {
  checkShape(shape);
  if (shape === 0) return 0;
  if (shape === 0.5) return 0.5 * stream.halfNormal() ** 2;
  if (shape === 1) return stream.exponential();
  const x = variateAbove(stream, offsetOf(shape), slopeOf(shape));
  return shape < 1 ? x * exp(-stream.exponential() / shape) : x;
}

/** The logarithm of a gamma variate, also where the variate itself would underflow; shape 0 gives `-Infinity`. */
export function logGammaVariate(stream: RandomStream, shape: number): number {
  checkShape(shape);
  if (shape === 0) return -Infinity;
  const boosted = log(variateAbove(stream, offsetOf(shape), slopeOf(shape)));
  return shape < 1 ? boosted - stream.exponential() / shape : boosted;
}

export function checkShape(shape: number): void {
  if (shape === 0 || (shape >= SMALLEST_SHAPE && shape < Infinity)) return;
  throw new RangeError(`a gamma shape must be 0, or finite and at least ${SMALLEST_SHAPE}, not ${shape}`);
}

/** The paper's `d`, of the shape or, below 1, of `shape + 1`. */
export function offsetOf(shape: number): number {
  return (shape < 1 ? shape + 1 : shape) - 1 / 3;
}

/** The paper's `c`. */
export function slopeOf(shape: number): number {
  return 1 / Math.sqrt(9 * offsetOf(shape));
}

/**
 * Fills `out` with gamma variates of the shapes of at least 1 (or, below 1, of `shape + 1`) that `offset` and `slope` stand
 * for: all normals first, then the words of the quick test, then whatever those need that fail it, in their order.
 */
export function fillVariatesAbove(
  stream: RandomStream,
  offset: Float64Array,
  slope: Float64Array,
  out: Float64Array,
  room: Room,
): void {
  fillNormals(stream, out, room);
  stream.fill(room.words, out.length);
  const undecided = keepInside(room.words, offset, slope, out, room.rejected);
  for (let r = 0; r < undecided; r++) {
    const i = room.rejected[r]!;
    const t = slope[i]! * out[i]!;
    const accepted = isAccepted(stream, room.words[i]!, offset[i]!, t);
    out[i] = accepted ? offset[i]! * cube(1 + t) : variateAbove(stream, offset[i]!, slope[i]!);
  }
}

/** Makes variates of the normals that pass the quick test, and lists the others; returns their number. */
function keepInside(
  words: Uint32Array,
  offset: Float64Array,
  slope: Float64Array,
  out: Float64Array,
  list: Int32Array,
): number {
  const count = out.length;
  let undecided = 0;
  for (let i = 0; i < count; i++) {
    const t = slope[i]! * out[i]!;
    if (isInside(words[i]!, offset[i]!, t)) out[i] = offset[i]! * cube(1 + t);
    else list[undecided++] = i;
  }
  return undecided;
}

function variateAbove(stream: RandomStream, offset: number, slope: number): number {
  for (;;) {
    const t = slope * stream.normal();
    const u = stream.word();
    if (isInside(u, offset, t) || isAccepted(stream, u, offset, t)) return offset * cube(1 + t);
  }
}

const cube = (x: number): number => x * x * x;

/**
 * A quick test that holds for every uniform number beginning with the 32 bits of `u`. For `|t| <= 1/2` the series of the
 * logarithm gives `ln(1 + t) - t + t^2 / 2 - t^3 / 3 >= -t^4 / 2`, so that `1 - 3 d t^4 / 2` lies under the acceptance
 * probability. At every shape it passes more than the paper's squeeze, `1 - 0.0331 x^4`, does in that range.
 */
function isInside(u: number, offset: number, t: number): boolean {
  const square = t * t;
  return square <= SQUARE_LIMIT && (u + 1) * 2 ** -32 < 1 - 1.5 * offset * square * square;
}

/**
 * The exact test, for a uniform number that begins with `u`. With `x^2 / 2 = 9 d t^2 / 2` the paper's bound
 * `x^2 / 2 + d (1 - v + ln v)` is `3 d (ln(1 + t) - t + t^2 / 2 - t^3 / 3)`, which does not cancel at large shapes.
 */
function isAccepted(stream: RandomStream, u: number, offset: number, t: number): boolean {
  if (t <= -1) return false;
  const uniform = (u + (stream.word() + 0.5) * 2 ** -32) * 2 ** -32;
  return log(uniform) < 3 * offset * fourthOrder(t);
}

/** Below this the logarithm's rounding would count, times an offset that grows as `t` shrinks: its series is summed instead. */
const SERIES_UP_TO = 0.25;

/** `ln(1 + t) - t + t^2 / 2 - t^3 / 3`. */
function fourthOrder(t: number): number {
  if (Math.abs(t) > SERIES_UP_TO) return log(1 + t) - t * (1 - t * (0.5 - t / 3));
  let power = -t * t * t * t;
  let sum = power / 4;
  for (let k = 5; ; k++) {
    power *= -t;
    const next = sum + power / k;
    if (next === sum) return sum;
    sum = next;
  }
}
