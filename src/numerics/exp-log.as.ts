/** `exp-log.ts` in AssemblyScript, bit for bit: see there for what is computed and why. */

const LN2: f64 = 0.6931471805599453;
const LN2_HIGH: f64 = 0.6931471803691238;
const LN2_LOW: f64 = 1.9082149292705877e-10;
const BIAS: i64 = 1023;
const LEAST: f64 = -746;
const MOST: f64 = 710;

export function exp(x: f64): f64 {
  if (!(x >= LEAST)) return x < LEAST ? 0 : NaN;
  if (x > MOST) return Infinity;
  const quotient = x / LN2;
  const below = floor(quotient);
  const k = quotient - below >= 0.5 ? below + 1 : below;
  const r = x - k * LN2_HIGH - k * LN2_LOW;
  const fraction = 1 + (2 * r) / (2 + cothRest(r * r) - r);
  const half = (<i32>k) >> 1;
  return fraction * powerOfTwo(half) * powerOfTwo(<i32>k - half);
}

function cothRest(q: f64): f64 {
  const high = 1.0 / 23950080.0 + q * (-691.0 / 653837184000.0 + q / 37362124800.0);
  return q * (1.0 / 6.0 + q * (-1.0 / 360.0 + q * (1.0 / 15120.0 + q * (-1.0 / 604800.0 + q * high))));
}

function powerOfTwo(exponent: i32): f64 {
  return reinterpret<f64>((<i64>exponent + BIAS) << 52);
}

/** 2^-1022. */
const LEAST_NORMAL: f64 = 2.2250738585072014e-308;
/** 2^54. */
const SCALE: f64 = 18014398509481984;
const UPPER_HALF: i64 = 0x6a09f;
const FRACTION: i64 = (1 << 52) - 1;

export function log(x: f64): f64 {
  if (x < LEAST_NORMAL) return x > 0 ? log(x * SCALE) - 54 * LN2 : x == 0 ? -Infinity : NaN;
  if (!(x < Infinity)) return x;
  const bits = reinterpret<i64>(x);
  const raised: i64 = (bits & FRACTION) >> 32 >= UPPER_HALF ? 1 : 0;
  const exponent = <f64>((bits >> 52) - BIAS + raised);
  const f = reinterpret<f64>((bits & FRACTION) | ((BIAS - raised) << 52)) - 1;
  const s = f / (2 + f);
  const half = 0.5 * f * f;
  return exponent * LN2_HIGH - (half - (s * (half + artanhRest(s * s)) + exponent * LN2_LOW) - f);
}

function artanhRest(q: f64): f64 {
  const high =
    2.0 / 13.0 + q * (2.0 / 15.0 + q * (2.0 / 17.0 + q * (2.0 / 19.0 + q * (2.0 / 21.0 + (q * 2.0) / 23.0))));
  return q * (2.0 / 3.0 + q * (2.0 / 5.0 + q * (2.0 / 7.0 + q * (2.0 / 9.0 + q * (2.0 / 11.0 + q * high)))));
}
