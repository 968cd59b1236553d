/** Decimal text to double, straight from bytes: no string is made for the numbers that event files usually hold. */

const ZERO = 48;
const PLUS = 43;
const MINUS = 45;
const DOT = 46;
const EXPONENT = 101;

/** Powers of ten that a double holds exactly (5^22 < 2^53 <= 5^23). */
const EXACT_POWERS = Float64Array.from({ length: 23 }, (_, k) => Number(`1e${k}`));
const LARGEST_EXACT_POWER = 22;
/** Any integer of this many digits is below 2^53, so a double holds it exactly. */
const EXACT_DIGITS = 15;
/** Any integer of this many digits fits 32 bits. */
const INTEGER_DIGITS = 9;
/** Digits of a double printed in full, and most that the double-double path takes. */
const FULL_DIGITS = 17;
/** An exponent of more digits is left to `Number`: it is far outside the fast paths. */
const MOST_EXPONENT_DIGITS = 4;

/** Where `readDecimal` puts the number it read, beside the place that it gives back. */
const held = new Float64Array(1);

/**
 * The double nearest to the decimal number in `bytes[from, to)` (ties to even, like `Number`), or `NaN` where the bytes
 * are no number; `isMissing` tells missing values from malformed ones. A number is an optional sign, digits with at
 * most one point among or around them, an optional exponent; or `inf` or `infinity` in any case, with an optional
 * sign. No blanks, no hexadecimal, no digit separators. Too large a number is an infinity, too small a one is zero.
 */
export function parseNumber(bytes: Uint8Array, from: number, to: number): number {
  if (from < to && readDecimal(bytes, from, to) === to) return held[0];
  return parseInfinity(bytes, from, to);
}

/**
 * Reads the decimal number that begins at `from` into `held`; the place of the first byte behind it, `to` at the
 * latest. Where none begins there that place is `from` and nothing is written.
 *
 * Numbers of at most 15 digits and a power of ten up to 22 take one correctly rounded operation on exact operands
 * (Clinger, "How to read floating point numbers accurately", PLDI 1990). Those of 16 and 17 digits, the usual output
 * of programs that print doubles in full, are divided in double-double arithmetic (Dekker, Numer. Math. 18 (1971)
 * 224); where its error bound could touch a rounding boundary, and for everything else, `Number` reads the text.
 */
function readDecimal(bytes: Uint8Array, from: number, to: number): number {
  let p = from;
  const negative = bytes[p] === MINUS;
  if (negative || bytes[p] === PLUS) p++;
  const begin = p;
  let whole = 0;
  for (; p < to; p++) {
    const digit = (bytes[p] - ZERO) >>> 0;
    if (digit > 9) break;
    whole = (Math.imul(whole, 10) + digit) | 0;
  }
  const wholeDigits = p - begin;
  let scale = 0;
  // The fraction in two integers: its first nine digits, and those behind.
  let near = 0;
  let far = 0;
  if (p < to && bytes[p] === DOT) {
    const first = ++p;
    const turn = first + INTEGER_DIGITS;
    for (; p < to; p++) {
      const digit = (bytes[p] - ZERO) >>> 0;
      if (digit > 9) break;
      if (p < turn) near = (Math.imul(near, 10) + digit) | 0;
      else far = (Math.imul(far, 10) + digit) | 0;
    }
    scale = p - first;
  }
  if (wholeDigits + scale === 0) return from;
  let exponent = -scale;
  if (p < to && (bytes[p] | 32) === EXPONENT) {
    const end = readExponent(bytes, p, to);
    if (end > p) exponent += exponentOf(bytes, p, end);
    p = end;
  }
  const digits = whole === 0 ? scale : wholeDigits + scale;
  if (
    wholeDigits > INTEGER_DIGITS ||
    digits > FULL_DIGITS ||
    exponent > LARGEST_EXACT_POWER ||
    exponent < -LARGEST_EXACT_POWER
  ) {
    held[0] = Number(textOf(bytes, from, p));
    return p;
  }
  const later = scale > INTEGER_DIGITS ? scale - INTEGER_DIGITS : 0;
  // Both products are exact: of 17 digits, whole * 5^scale and near * 5^later stay below 2^53.
  const high = whole * EXACT_POWERS[scale];
  const middle = near * EXACT_POWERS[later];
  if (digits <= EXACT_DIGITS) {
    const all = high + (middle + far);
    const size = exponent < 0 ? all / EXACT_POWERS[-exponent] : all * EXACT_POWERS[exponent];
    held[0] = negative ? -size : size;
  } else if (exponent > 0 || !divide(high, middle, far, EXACT_POWERS[-exponent], negative)) {
    held[0] = Number(textOf(bytes, from, p));
  }
  return p;
}

/** The end of the exponent (`e`, a sign, digits) that begins at `from`; `from` where there are no digits. */
function readExponent(bytes: Uint8Array, from: number, to: number): number {
  const begin = bytes[from + 1] === MINUS || bytes[from + 1] === PLUS ? from + 2 : from + 1;
  let p = begin;
  while (p < to && (bytes[p] - ZERO) >>> 0 <= 9) p++;
  return p > begin ? p : from;
}

/** The value of the exponent in `bytes[from, to)`, infinite where it is too long for the fast paths. */
function exponentOf(bytes: Uint8Array, from: number, to: number): number {
  let value = 0;
  let p = from + 1;
  if (bytes[p] === MINUS || bytes[p] === PLUS) p++;
  if (to - p > MOST_EXPONENT_DIGITS) return Infinity;
  for (; p < to; p++) value = value * 10 + bytes[p] - ZERO;
  return bytes[from + 1] === MINUS ? -value : value;
}

/** 2^27 + 1 splits a double into two halves of 26 bits (Dekker 1971, with Veltkamp's constant). */
const SPLITTER = 134217729;
/**
 * The quotient below has a relative error under 2^-51 of its second part; four times that is a bound with room for the
 * rounding of the test itself.
 */
const QUOTIENT_ERROR = 2 ** -49;

/**
 * Writes `(high + middle + far) / by`, correctly rounded, for integers of which `high` and `middle` are exact, `far` is
 * below 2^30 and `by` below 2^75; false where the result is too close to a rounding boundary to call.
 */
function divide(high: number, middle: number, far: number, by: number, negative: boolean): boolean {
  const upper = high + middle;
  const lost = high > middle ? middle - (upper - high) : high - (upper - middle);
  const sum = upper + (lost + far);
  const rest = lost + far - (sum - upper);
  const quotient = sum / by;
  const product = quotient * by;
  const second = (sum - product - productError(quotient, by, product) + rest) / by;
  const rounded = quotient + second;
  const left = second - (rounded - quotient);
  const bound = Math.abs(second) * QUOTIENT_ERROR;
  held[0] = negative ? -rounded : rounded;
  return rounded + (left + bound) === rounded && rounded + (left - bound) === rounded;
}

/** `a * b - product`, exactly, for `product` the rounded `a * b` (Dekker's product). */
function productError(a: number, b: number, product: number): number {
  const aBig = a * SPLITTER;
  const aHigh = aBig - (aBig - a);
  const aLow = a - aHigh;
  const bBig = b * SPLITTER;
  const bHigh = bBig - (bBig - b);
  const bLow = b - bHigh;
  return aHigh * bHigh - product + aHigh * bLow + aLow * bHigh + aLow * bLow;
}

function parseInfinity(bytes: Uint8Array, from: number, to: number): number {
  const negative = bytes[from] === MINUS;
  const word = from < to && (negative || bytes[from] === PLUS) ? from + 1 : from;
  if (!spells(bytes, word, to, INF) && !spells(bytes, word, to, INFINITY)) return NaN;
  return negative ? -Infinity : Infinity;
}

const INF = lowerCase('inf');
const INFINITY = lowerCase('infinity');
const NULL = lowerCase('null');
const NAN = lowerCase('nan');

const encoder = new TextEncoder();

/** The number that a text stands for, blanks around it set aside; `NaN` where it is missing, `null` where it is none. */
export function numberOf(text: string): number | null {
  const bytes = encoder.encode(text.trim());
  const value = parseNumber(bytes, 0, bytes.length);
  return value === value || isMissing(bytes, 0, bytes.length) ? value : null;
}

/** True for what stands for a missing value: nothing at all, `null`, or `nan` with or without a sign; in any case. */
export function isMissing(bytes: Uint8Array, from: number, to: number): boolean {
  if (from === to) return true;
  const signed = bytes[from] === MINUS || bytes[from] === PLUS;
  return spells(bytes, from, to, NULL) || spells(bytes, signed ? from + 1 : from, to, NAN);
}

function spells(bytes: Uint8Array, from: number, to: number, word: Uint8Array): boolean {
  if (to - from !== word.length) return false;
  for (let i = 0; i < word.length; i++) if ((bytes[from + i] | 32) !== word[i]) return false;
  return true;
}

function lowerCase(word: string): Uint8Array {
  return Uint8Array.from(word, (c) => c.charCodeAt(0));
}

function textOf(bytes: Uint8Array, from: number, to: number): string {
  let text = '';
  for (let p = from; p < to; p++) text += String.fromCharCode(bytes[p]);
  return text;
}
