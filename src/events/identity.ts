import { isMissing } from './number';
import { murmur128 } from './murmur';

/**
 * Identities of events as 64-bit keys, a `high` and a `low` word, the same in every format:
 * - Missing (see `isMissing`) is 0, 0.
 * - A decimal integer of at most 15 digits, leading zeros and a fraction of zeros set aside (`42`, `-7`, `0042`, `42.0`),
 *   is its size in the low 50 bits, bit 62 for a minus sign, bit 63 set.
 * - Any other text is the first 64 bits of its MurmurHash3_x86_128 (seed 0), bit 63 cleared. The chance that any two of
 *   `n` different texts share a key is about `n^2 / 2^64`: 5e-6 for ten million.
 * A number in a binary format has the key of its shortest decimal text.
 */
const INTEGER = 0x80000000;
const NEGATIVE = 0x40000000;
const TEXT = 0x7fffffff;
/** Below 10^15 an integer is exact as a double and its text has no exponent. */
const MOST_DIGITS = 15;
const BEYOND_INTEGERS = 1e15;
const TWO_32 = 2 ** 32;

const hashed = new Uint32Array(4);

/** Writes the key of the text `bytes[from, to)` at `at`. */
export function identify(bytes: Uint8Array, from: number, to: number, high: Uint32Array, low: Uint32Array, at: number) {
  const integer = integerOf(bytes, from, to);
  if (integer === integer) return identifyInteger(integer, bytes[from] === 45, high, low, at);
  if (isMissing(bytes, from, to)) {
    high[at] = 0;
    low[at] = 0;
    return;
  }
  murmur128(bytes, from, to, 0, hashed);
  high[at] = hashed[0] & TEXT;
  // A hash of 0, 0 would read as missing.
  low[at] = high[at] === 0 && hashed[1] === 0 ? 1 : hashed[1];
}

/** Writes the key of a number at `at`: that of its shortest decimal text; `NaN` is missing. */
export function identifyNumber(value: number, high: Uint32Array, low: Uint32Array, at: number): void {
  const size = Math.abs(value);
  if (Number.isInteger(value) && size < BEYOND_INTEGERS) identifyInteger(size, value < 0, high, low, at);
  else identifyText(String(value), high, low, at);
}

const encoder = new TextEncoder();

/** Writes the key of a text at `at`, blanks around it set aside. */
export function identifyText(text: string, high: Uint32Array, low: Uint32Array, at: number): void {
  const bytes = encoder.encode(text.trim());
  identify(bytes, 0, bytes.length, high, low, at);
}

function identifyInteger(size: number, negative: boolean, high: Uint32Array, low: Uint32Array, at: number): void {
  high[at] = INTEGER | (negative && size > 0 ? NEGATIVE : 0) | (size / TWO_32);
  low[at] = size % TWO_32;
}

/** The size of a decimal integer of at most 15 significant digits; `NaN` for any other text. */
function integerOf(bytes: Uint8Array, from: number, to: number): number {
  let p = bytes[from] === 45 || bytes[from] === 43 ? from + 1 : from;
  const begin = p;
  let value = 0;
  let significant = 0;
  for (; p < to; p++) {
    const digit = bytes[p] - 48;
    if (digit < 0 || digit > 9) break;
    value = value * 10 + digit;
    if (value > 0 && ++significant > MOST_DIGITS) return NaN;
  }
  if (p <= begin) return NaN;
  if (p < to && bytes[p] === 46)
    do p++;
    while (p < to && bytes[p] === 48);
  return p === to ? value : NaN;
}
