/**
 * AssemblyScript: built to WebAssembly, for its 64-bit integers and its vectors of bytes (see DEVELOPERS.md). The quick
 * way through lines of a delimited table: places where fields may end are found 64 bytes at a time, and short numbers are
 * read without a look at single bytes. `quick-lines.ts` lays out the memory and tells what is asked.
 */

const LINE_FEED: u8 = 10;
const RETURN: u8 = 13;
const TAB: u8 = 9;
const SPACE: u8 = 32;
const QUOTE: u8 = 34;
const MINUS: u8 = 45;

const SKIPPED: u8 = 0;
const NUMBER: u8 = 1;

let fields: i32 = 0;
let delimiter: u8 = 0;
let capacity: i32 = 0;
/** Bytes whose stops are found at a time: a longer line is left. */
let stretch: usize = 0;

/** Addresses. Of the bytes that hold the lines: places handed out count from it. */
let room: usize = 0;
/** A byte a field: its kind; */
let kinds: usize = 0;
/** the address of its numbers (u32 a field); */
let targets: usize = 0;
/** stops of a stretch (u32); */
let stops: usize = 0;
/** begins of lines, in the room (u32 a row); */
let begins: usize = 0;
/** fields left to the caller (four u32 each: row, field, begin and end in the room, without blanks at either end); */
let leftovers: usize = 0;
/** powers of ten (f64). */
let powers: usize = 0;

/** What the last call of `parse` left behind: rows in all, leftovers. */
export let rows: i32 = 0;
export let left: i32 = 0;

export function begin(
  fieldCount: i32,
  delimiterByte: i32,
  rowCapacity: i32,
  stretchBytes: i32,
  roomAt: i32,
  kindsAt: i32,
  targetsAt: i32,
  stopsAt: i32,
  beginsAt: i32,
  leftoversAt: i32,
  powersAt: i32,
): void {
  fields = fieldCount;
  delimiter = <u8>delimiterByte;
  capacity = rowCapacity;
  stretch = stretchBytes;
  room = roomAt;
  kinds = kindsAt;
  targets = targetsAt;
  stops = stopsAt;
  begins = beginsAt;
  leftovers = leftoversAt;
  powers = powersAt;
}

/**
 * Parses whole lines from `from` on, the last of which ends before `to`, into rows from `firstRow` on, as long as there is room
 * and nothing about them is unusual; the begin of the first line not parsed. 64 bytes behind `to` and 16 before `from`
 * may be read.
 */
export function parse(from: i32, to: i32, firstRow: i32): i32 {
  const bound = room + to;
  let line = room + from;
  let usual = true;
  rows = firstRow;
  left = 0;
  while (usual && line < bound && rows < capacity) {
    const end = findStops(line, min<usize>(bound, line + stretch));
    const next = parseStretch(line, end);
    // Where a whole stretch is no line, the line is too long; where some lines were, the rest of one waits for more.
    usual = next > line && !stuck;
    line = next;
  }
  return <i32>(line - room);
}

/** Whether `parseStretch` met something unusual. */
let stuck: bool = false;

/** Writes the address of each delimiter, quote and line end of `[from, to)` to `stops`; the end of the list. */
function findStops(from: usize, to: usize): usize {
  const delimiters = i8x16.splat(delimiter);
  const feeds = i8x16.splat(LINE_FEED);
  const returns = i8x16.splat(RETURN);
  const quotes = i8x16.splat(QUOTE);
  let at = stops;
  for (let p = from; p < to; p += 64) {
    let found: u64 = 0;
    for (let part = 0; part < 4; part++) {
      const bytes = v128.load(p + 16 * part);
      const hits = v128.or(
        v128.or(i8x16.eq(bytes, delimiters), i8x16.eq(bytes, feeds)),
        v128.or(i8x16.eq(bytes, quotes), i8x16.eq(bytes, returns)),
      );
      found |= (<u64>i8x16.bitmask(hits)) << (16 * part);
    }
    if (p + 64 > to) found &= ((<u64>1) << (to - p)) - 1;
    const next = at + ((<usize>popcnt(found)) << 2);
    // Two at a time, the last perhaps in vain: how many there are is hard to foretell.
    while (found != 0) {
      store<u32>(at, <u32>(p + <usize>ctz(found)));
      found &= found - 1;
      store<u32>(at, <u32>(p + <usize>ctz(found)), 4);
      found &= found - 1;
      at += 8;
    }
    at = next;
  }
  return at;
}

/** Parses the lines of a stretch from its stops; the begin of the first line not parsed. */
function parseStretch(from: usize, end: usize): usize {
  const count = fields;
  const last = count - 1;
  let line = from;
  let stop = stops;
  let row = rows;
  let leftover = leftovers + ((<usize>left) << 4);
  stuck = false;
  while (row < capacity) {
    let p = line;
    let after = leftover;
    let field = 0;
    for (; field < count && stop < end; field++) {
      let to: usize = load<u32>(stop);
      stop += 4;
      let from = p;
      if (load<u8>(to) == QUOTE) {
        // A quoted field: from quote to quote, and nothing around them.
        if (to != p) break;
        while (stop < end && load<u8>(load<u32>(stop)) != QUOTE && load<u8>(load<u32>(stop)) != LINE_FEED) stop += 4;
        if (stop >= end) break;
        const closing: usize = load<u32>(stop);
        stop += 4;
        if (load<u8>(closing) != QUOTE || stop >= end) break;
        stop += 4;
        from = p + 1;
        to = closing;
        p = closing + 2;
      } else p = to + 1;
      const ended = load<u8>(p - 1);
      if (ended != delimiter) {
        if (field < last) break;
        if (ended == RETURN) {
          if (stop >= end || load<u32>(stop) != <u32>p || load<u8>(p) != LINE_FEED) break;
          stop += 4;
          p++;
        } else if (ended != LINE_FEED) break;
      } else if (field == last) break;
      const kind = load<u8>(kinds + field);
      if (kind == SKIPPED) continue;
      if (kind == NUMBER && readNumber(from, to, load<u32>(targets + (field << 2)) + (row << 3))) continue;
      while (from < to && isBlank(load<u8>(from))) from++;
      while (to > from && isBlank(load<u8>(to - 1))) to--;
      store<u32>(after, row);
      store<u32>(after, field, 4);
      store<u32>(after, <u32>(from - room), 8);
      store<u32>(after, <u32>(to - room), 12);
      after += 16;
    }
    if (field < count) {
      // Out of stops the line goes on behind the stretch; else it is unusual.
      stuck = stop < end;
      break;
    }
    // A line of a one-column table that ends in a blank may be blank altogether.
    if (last == 0 && isBlankEnd(line, p)) {
      stuck = true;
      break;
    }
    store<u32>(begins + (row << 2), <u32>(line - room));
    leftover = after;
    line = p;
    row++;
  }
  rows = row;
  left = <i32>((leftover - leftovers) >> 4);
  return line;
}

function isBlank(byte: u8): bool {
  return byte == SPACE || byte == TAB;
}

/** Whether nothing, or a blank, stands before the end of the line that ends before `next`. */
function isBlankEnd(line: usize, next: usize): bool {
  let end = next - 1;
  if (end > line && load<u8>(end - 1) == RETURN) end--;
  return end == line || load<u8>(end - 1) <= SPACE;
}

const LOW_BITS: u64 = 0x0101010101010101;
const HIGH_BITS: u64 = 0x8080808080808080;
const ZEROS: u64 = 0x3030303030303030;
const DOTS: u64 = 0x2e2e2e2e2e2e2e2e;
const HIGH_HALVES: u64 = 0xf0f0f0f0f0f0f0f0;
/** Any integer below it is exact as a double. */
const EXACT: u64 = 1 << 53;
const NO_DIGITS: u64 = u64.MAX_VALUE;
/** Largest value of the digits of a number: below 2^60. */
const MOST: u64 = 1_000_000_000_000_000_000;
/** The largest power of ten that is exact as a double. */
const LARGEST_POWER: usize = 22;

/**
 * Writes the number `[from, to)` to `into` and returns true: digits, at most 24 bytes of them, with at most one point, a
 * minus sign and an exponent, or nothing at all (`NaN`). Correctly rounded. False for anything else, for too many digits,
 * and where the nearest double is too hard to tell.
 */
function readNumber(from: usize, to: usize, into: usize): bool {
  if (from == to) {
    store<f64>(into, NaN);
    return true;
  }
  const negative = load<u8>(from) == MINUS;
  const begin = from + <usize>negative;
  const length = to - begin;
  // Also where nothing follows the sign: 0 - 1 is a large number.
  if (length - 1 > 23) return false;
  if (length > 8) return readLong(begin, to, negative, into);
  let digits = lastBytes(to, length);
  const dot = dotIn(digits);
  let scale: usize = 0;
  if (dot != 0) {
    if (length == 1) return false;
    const at = (<u64>ctz(dot)) & ~7;
    const before = ((<u64>1) << at) - 1;
    scale = 7 - <usize>(at >> 3);
    // The digits before the point move up over it, behind another zero.
    digits = (digits & ~((before << 8) | 0xff)) | ((digits & before) << 8) | 0x30;
  }
  if (!areDigits(digits)) return length > 4 ? readLong(begin, to, negative, into) : false;
  write(<f64>(<i64>valueOf(digits)) / power(scale), negative, into);
  return true;
}

/** `readNumber` of 5 to 24 bytes, perhaps with an exponent of a sign and two digits. */
function readLong(begin: usize, to: usize, negative: bool, into: usize): bool {
  const exponent = exponentBefore(to);
  const end = exponent == NO_EXPONENT ? to : to - 4;
  const dot = dotBetween(begin, end);
  const whole = longValue(begin, dot);
  const scale = dot < end ? end - dot - 1 : 0;
  const fraction = scale > 0 ? longValue(dot + 1, end) : 0;
  if (whole > MOST || fraction > MOST || scale > LARGEST_POWER || (dot == begin && scale == 0)) return false;
  // Rounding may lose what is far below the limit, never what would be above it.
  if (<f64>(<i64>whole) * power(scale) + <f64>(<i64>fraction) > <f64>MOST) return false;
  const value = whole == 0 ? fraction : whole * <u64>power(scale) + fraction;
  const ten = (exponent == NO_EXPONENT ? 0 : exponent) - <i32>scale;
  if (abs(ten) > <i32>LARGEST_POWER || (value > EXACT && ten > 0)) return false;
  const size = <f64>(<i64>value);
  if (ten > 0) return write(size * power(ten), negative, into);
  if (ten == 0 || value <= EXACT) return write(size / power(-ten), negative, into);
  return divide(value, power(-ten), negative, into);
}

const NO_EXPONENT: i32 = i32.MIN_VALUE;
const EXPONENT: u8 = 101;
const PLUS: u8 = 43;

/** The exponent in the last four bytes before `to`: `e`, a sign, two digits. */
function exponentBefore(to: usize): i32 {
  if ((load<u8>(to - 4) | 32) != EXPONENT) return NO_EXPONENT;
  const sign = load<u8>(to - 3);
  const tens = <u32>load<u8>(to - 2) - 48;
  const ones = <u32>load<u8>(to - 1) - 48;
  if (tens > 9 || ones > 9 || (sign != MINUS && sign != PLUS)) return NO_EXPONENT;
  const size = <i32>(10 * tens + ones);
  return sign == MINUS ? -size : size;
}

/** The place of the first point in `[begin, to)`, up to 24 bytes; `to` where there is none. */
function dotBetween(begin: usize, to: usize): usize {
  const length = to - begin;
  if (length > 16) {
    const dot = dotIn(lastBytes(to - 16, length - 16));
    if (dot != 0) return to - 24 + <usize>(ctz(dot) >> 3);
  }
  if (length > 8) {
    const dot = dotIn(lastBytes(to - 8, min<usize>(length - 8, 8)));
    if (dot != 0) return to - 16 + <usize>(ctz(dot) >> 3);
  }
  const last = dotIn(lastBytes(to, min<usize>(length, 8)));
  return last == 0 ? to : to - 8 + <usize>(ctz(last) >> 3);
}

function power(scale: usize): f64 {
  return load<f64>(powers + (scale << 3));
}

function write(size: f64, negative: bool, into: usize): bool {
  store<f64>(into, negative ? -size : size);
  return true;
}

/** 2^27 + 1 splits a double into two halves of 26 bits (Dekker, Numer. Math. 18 (1971) 224). */
const SPLITTER: f64 = 134217729;
/**
 * The quotient has a relative error under 2^-51 of its second part; four times that is a bound with room for the rounding
 * of the test itself.
 */
const QUOTIENT_ERROR: f64 = 1.0 / 562949953421312.0;
/** The low bits of a value of at most 2^60: those above fit a double. */
const LOW_PART: u64 = 0x7ff;

/** Writes `value / by`, correctly rounded, by double-double division; false where it is too close to a rounding boundary. */
function divide(value: u64, by: f64, negative: bool, into: usize): bool {
  const high = <f64>(<i64>(value & ~LOW_PART));
  const low = <f64>(<i64>(value & LOW_PART));
  const sum = high + low;
  const rest = low - (sum - high);
  const quotient = sum / by;
  const product = quotient * by;
  const second = (sum - product - productError(quotient, by, product) + rest) / by;
  const rounded = quotient + second;
  const left = second - (rounded - quotient);
  const bound = abs(second) * QUOTIENT_ERROR;
  write(rounded, negative, into);
  return rounded + (left + bound) == rounded && rounded + (left - bound) == rounded;
}

/** `a * b - product`, exactly, for `product` the rounded `a * b` (Dekker's product). */
function productError(a: f64, b: f64, product: f64): f64 {
  const aBig = a * SPLITTER;
  const aHigh = aBig - (aBig - a);
  const aLow = a - aHigh;
  const bBig = b * SPLITTER;
  const bHigh = bBig - (bBig - b);
  const bLow = b - bHigh;
  return aHigh * bHigh - product + aHigh * bLow + aLow * bHigh + aLow * bLow;
}

/** The value of 0 to 24 digits, or `NO_DIGITS` where it is above `MOST` or they are none. */
function longValue(from: usize, to: usize): u64 {
  const length = to - from;
  const low = lastBytes(to, min<usize>(length, 8));
  if (!areDigits(low)) return NO_DIGITS;
  if (length <= 8) return valueOf(low);
  const middle = lastBytes(to - 8, min<usize>(length - 8, 8));
  if (!areDigits(middle)) return NO_DIGITS;
  const lower = valueOf(middle) * 100_000_000 + valueOf(low);
  if (length <= 16) return lower;
  const high = lastBytes(to - 16, length - 16);
  if (!areDigits(high)) return NO_DIGITS;
  const upper = valueOf(high);
  return upper < MOST / 10_000_000_000_000_000 ? upper * 10_000_000_000_000_000 + lower : NO_DIGITS;
}

/** The last `length` of the 8 bytes before `to`, 0 to 8 of them, the others zeros (the digit). */
function lastBytes(to: usize, length: usize): u64 {
  if (length == 0) return ZEROS;
  const kept = u64.MAX_VALUE << ((8 - <u64>length) << 3);
  return (load<u64>(to - 8) & kept) | (ZEROS & ~kept);
}

/** The high bit of each byte that is a point, up to the first. Source: the zero-byte test of Mycroft (1987), common practice. */
function dotIn(bytes: u64): u64 {
  const x = bytes ^ DOTS;
  return (x - LOW_BITS) & ~x & HIGH_BITS;
}

function areDigits(bytes: u64): bool {
  const upper = (bytes & HIGH_HALVES) ^ ZEROS;
  const carried = ((bytes + 0x0606060606060606) & HIGH_HALVES) ^ ZEROS;
  return (upper | carried) == 0;
}

/** The value of eight digits: pairs, then fours, then all. Common practice. */
function valueOf(digits: u64): u64 {
  const pairs = ((digits & 0x0f0f0f0f0f0f0f0f) * 2561) >> 8;
  const fours = ((pairs & 0x00ff00ff00ff00ff) * 6553601) >> 16;
  return ((fours & 0x0000ffff0000ffff) * 42949672960001) >> 32;
}
