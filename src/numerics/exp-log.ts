/**
 * The exponential and the logarithm in additions, multiplications and divisions alone, which IEEE 754 fixes to the last bit.
 * ECMAScript leaves `Math.exp` and `Math.log` to the engine: what must be the same bytes everywhere is made with these.
 */

/** ln 2 in two pieces; the first ends in 21 zero bits, so that its product with an exponent is exact. */
const LN2_HIGH = 0.6931471803691238;
const LN2_LOW = 1.9082149292705877e-10;

/** A double whose exponent is read and written as bits. */
const double = new Float64Array(1);
const bits = new Int32Array(double.buffer);
const HIGH = new Uint8Array(Uint32Array.of(1).buffer)[0] === 1 ? 1 : 0;
const FRACTION_BITS = 0xfffff;
const BIAS = 1023;

/** Below the one the exponential is 0, above the other infinite. */
const LEAST = -746;
const MOST = 710;

/** `e^x` within 1.2 units in the last place; 0 below about -745.1, infinite above about 709.8. */
export function exp(x: number): number {
  if (!(x >= LEAST)) return x < LEAST ? 0 : NaN;
  if (x > MOST) return Infinity;
  const k = Math.round(x / Math.LN2);
  const r = x - k * LN2_HIGH - k * LN2_LOW;
  const fraction = 1 + (2 * r) / (2 + cothRest(r * r) - r);
  // In two steps, so that neither factor leaves the normal doubles and a subnormal result is rounded once.
  const half = k >> 1;
  return fraction * powerOfTwo(half) * powerOfTwo(k - half);
}

/** `r coth(r / 2) - 2 = sum 2 B_2k r^2k / (2k)!` of `r^2` (DLMF 4.19.6), to below 1e-17 for `|r| <= ln 2 / 2`. */
function cothRest(q: number): number {
  const high = 1 / 23950080 + q * (-691 / 653837184000 + q / 37362124800);
  return q * (1 / 6 + q * (-1 / 360 + q * (1 / 15120 + q * (-1 / 604800 + q * high))));
}

function powerOfTwo(exponent: number): number {
  bits[1 - HIGH] = 0;
  bits[HIGH] = (exponent + BIAS) << 20;
  return double[0]!;
}

const LEAST_NORMAL = 2 ** -1022;

/** High bits of the fraction of `sqrt 2`: from there on a number is taken as its half, with one more in the exponent. */
const UPPER_HALF = 0x6a09f;

/** `ln x` within 1 unit in the last place; `-Infinity` at 0, `NaN` below 0. */
export function log(x: number): number {
  if (x < LEAST_NORMAL) return x > 0 ? log(x * 2 ** 54) - 54 * Math.LN2 : x === 0 ? -Infinity : NaN;
  if (!(x < Infinity)) return x;
  double[0] = x;
  const high = bits[HIGH]!;
  const fraction = high & FRACTION_BITS;
  const raised = fraction >= UPPER_HALF ? 1 : 0;
  const exponent = (high >> 20) - BIAS + raised;
  bits[HIGH] = fraction | ((BIAS - raised) << 20);
  // ln(1 + f) = f - f^2 / 2 + s (f^2 / 2 + rest) with s = f / (2 + f): what is rounded is small beside f.
  const f = double[0] - 1;
  const s = f / (2 + f);
  const half = 0.5 * f * f;
  return exponent * LN2_HIGH - (half - (s * (half + artanhRest(s * s)) + exponent * LN2_LOW) - f);
}

/** `ln((1 + s) / (1 - s)) / s - 2 = 2 s^2 / 3 + 2 s^4 / 5 + ...` of `s^2`, to below 1e-17 up to that of `sqrt 2`, 0.0295. */
function artanhRest(q: number): number {
  const high = 2 / 13 + q * (2 / 15 + q * (2 / 17 + q * (2 / 19 + q * (2 / 21 + (q * 2) / 23))));
  return q * (2 / 3 + q * (2 / 5 + q * (2 / 7 + q * (2 / 9 + q * (2 / 11 + q * high)))));
}
