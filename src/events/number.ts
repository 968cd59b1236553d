/** Decimal text to double, straight from bytes: no string is made for the numbers that event files usually hold. */

const ZERO = 48;
const PLUS = 43;
const MINUS = 45;
const DOT = 46;

/** Powers of ten that a double holds exactly (5^22 < 2^53 <= 5^23). */
const EXACT_POWERS = Float64Array.from({ length: 23 }, (_, k) => Number(`1e${k}`));
const LARGEST_EXACT_POWER = 22;
/** Any integer of this many digits is below 2^53, so a double holds it exactly. */
const EXACT_DIGITS = 15;
/** Significant digits gathered in the first and in the second integer; both stay below 2^31. */
const FIRST_DIGITS = 8;
const SECOND_DIGITS = 9;
/** An exponent of more digits is left to `Number`: it is far outside the fast paths. */
const MOST_EXPONENT_DIGITS = 4;

/**
 * The double nearest to the decimal number in `bytes[from, to)` (ties to even, like `Number`), or `NaN` where the bytes
 * are no number; `isMissing` tells missing values from malformed ones. A number is an optional sign, digits with at
 * most one point among or around them, an optional exponent; or `inf` or `infinity` in any case, with an optional
 * sign. No blanks, no hexadecimal, no digit separators. Too large a number is an infinity, too small a one is zero.
 *
 * Numbers of at most 15 digits and a power of ten up to 22 take one correctly rounded operation on exact operands
 * (Clinger, "How to read floating point numbers accurately", PLDI 1990). Those of 16 and 17 digits, the usual output
 * of programs that print doubles in full, are divided in double-double arithmetic (Dekker, Numer. Math. 18 (1971)
 * 224); where its error bound could touch a rounding boundary, and for everything else, `Number` reads the text.
 */
export function parseNumber(bytes: Uint8Array, from: number, to: number): number {
  let p = from;
  const negative = bytes[p] === MINUS;
  if (p < to && (negative || bytes[p] === PLUS)) p++;
  let first = 0;
  let second = 0;
  let significant = 0;
  let scale = 0;
  let seen = 0;
  let point = false;
  for (; p < to; p++) {
    const digit = bytes[p] - ZERO;
    if (digit >= 0 && digit <= 9) {
      seen++;
      if (point) scale++;
      if (significant > 0 || digit > 0) {
        if (significant < FIRST_DIGITS) first = first * 10 + digit;
        else if (significant < FIRST_DIGITS + SECOND_DIGITS) second = second * 10 + digit;
        significant++;
      }
    } else if (bytes[p] === DOT && !point) point = true;
    else break;
  }
  if (seen === 0) return parseInfinity(bytes, p, to, negative, point);
  let exponent = -scale;
  if (p < to) {
    const written = parseExponent(bytes, p, to);
    if (written !== written) return NaN;
    exponent += written;
  }
  const size = magnitude(first, second, significant, exponent);
  if (size !== size) return Number(textOf(bytes, from, to));
  return negative ? -size : size;
}

/** `e`, a sign, digits up to `to`: the exponent; infinite where it is too long for the fast paths, `NaN` if malformed. */
function parseExponent(bytes: Uint8Array, from: number, to: number): number {
  if ((bytes[from] | 32) !== 101) return NaN;
  let p = from + 1;
  const negative = bytes[p] === MINUS;
  if (p < to && (negative || bytes[p] === PLUS)) p++;
  const begin = p;
  let value = 0;
  for (; p < to; p++) {
    const digit = bytes[p] - ZERO;
    if (digit < 0 || digit > 9) return NaN;
    if (p - begin < MOST_EXPONENT_DIGITS) value = value * 10 + digit;
  }
  if (p === begin) return NaN;
  if (p - begin > MOST_EXPONENT_DIGITS) value = Infinity;
  return negative ? -value : value;
}

/** The number of `significant` digits times a power of ten, correctly rounded; `NaN` where no fast path is safe. */
function magnitude(first: number, second: number, significant: number, exponent: number): number {
  if (significant === 0) return 0;
  if (exponent > LARGEST_EXACT_POWER || exponent < -LARGEST_EXACT_POWER) return NaN;
  const later = significant > FIRST_DIGITS ? significant - FIRST_DIGITS : 0;
  if (significant <= EXACT_DIGITS) {
    const digits = first * EXACT_POWERS[later] + second;
    return exponent < 0 ? digits / EXACT_POWERS[-exponent] : digits * EXACT_POWERS[exponent];
  }
  if (significant > FIRST_DIGITS + SECOND_DIGITS || exponent > 0) return NaN;
  return divide(first * EXACT_POWERS[later], second, EXACT_POWERS[-exponent]);
}

/** 2^27 + 1 splits a double into two halves of 26 bits (Dekker 1971, with Veltkamp's constant). */
const SPLITTER = 134217729;
/**
 * The quotient below has a relative error under 2^-51 of its second part; four times that is a bound with room for the
 * rounding of the test itself.
 */
const QUOTIENT_ERROR = 2 ** -49;

/** `(high + low) / by` correctly rounded for exact, positive operands, `by` below 2^75; `NaN` where it is too close to call. */
function divide(high: number, low: number, by: number): number {
  const sum = high + low;
  const rest = low - (sum - high);
  const quotient = sum / by;
  const product = quotient * by;
  const second = (sum - product - productError(quotient, by, product) + rest) / by;
  const rounded = quotient + second;
  const left = second - (rounded - quotient);
  const bound = Math.abs(second) * QUOTIENT_ERROR;
  return rounded + (left + bound) === rounded && rounded + (left - bound) === rounded ? rounded : NaN;
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

function parseInfinity(bytes: Uint8Array, from: number, to: number, negative: boolean, point: boolean): number {
  if (point || !(spells(bytes, from, to, INF) || spells(bytes, from, to, INFINITY))) return NaN;
  return negative ? -Infinity : Infinity;
}

const INF = lowerCase('inf');
const INFINITY = lowerCase('infinity');
const NULL = lowerCase('null');
const NAN = lowerCase('nan');

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
