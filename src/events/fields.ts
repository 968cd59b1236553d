const COMMA = 44;
const QUOTE = 34;
const SPACE = 32;
const TAB = 9;

/**
 * The fields of one line of a delimited table, as places in its bytes. Blanks around a field are set aside. A field that
 * begins with a quote ends at the next single quote, doubled quotes inside stand for one (RFC 4180), and are undoubled
 * in place: the line's bytes change. A quote elsewhere in a field is a plain character.
 */
export class Fields {
  starts: Int32Array;
  ends: Int32Array;

  /** With room for `least` fields; more are made room for as they come. */
  constructor(least = 64) {
    this.starts = new Int32Array(least);
    this.ends = new Int32Array(least);
  }

  /**
   * Cuts `bytes[from, to)`, a line without its end; the number of fields, at least 1. Where a quoted field is not
   * closed, or something other than blanks follows its quote, the result is `-1 - field`.
   */
  cut(bytes: Uint8Array, from: number, to: number, delimiter = COMMA): number {
    let count = 0;
    for (let p = from; ; p++) {
      if (count === this.starts.length) this.grow();
      const begin = skipBlanks(bytes, p, to, delimiter);
      const quoted = begin < to && bytes[begin] === QUOTE;
      const after = quoted ? this.quoted(bytes, begin, to, count) : begin;
      if (after < 0) return -1 - count;
      p = after;
      while (p < to && bytes[p] !== delimiter) p++;
      if (quoted) {
        if (skipBlanks(bytes, after, to, delimiter) < p) return -1 - count;
      } else {
        this.starts[count] = begin;
        this.ends[count] = trimmedEnd(bytes, begin, p);
      }
      count++;
      if (p >= to) return count;
    }
  }

  /** Reads the quoted field that begins at `begin`; where it ends, behind its closing quote, or -1. */
  private quoted(bytes: Uint8Array, begin: number, to: number, field: number): number {
    let kept = begin + 1;
    for (let p = begin + 1; p < to; p++) {
      if (bytes[p] === QUOTE) {
        if (p + 1 >= to || bytes[p + 1] !== QUOTE) {
          this.starts[field] = skipBlanks(bytes, begin + 1, kept, -1);
          this.ends[field] = trimmedEnd(bytes, this.starts[field], kept);
          return p + 1;
        }
        p++;
      }
      bytes[kept++] = bytes[p];
    }
    return -1;
  }

  private grow(): void {
    const { starts, ends } = this;
    this.starts = new Int32Array(starts.length * 2 + 1);
    this.ends = new Int32Array(ends.length * 2 + 1);
    this.starts.set(starts);
    this.ends.set(ends);
  }
}

function skipBlanks(bytes: Uint8Array, from: number, to: number, delimiter: number): number {
  let p = from;
  while (p < to && (bytes[p] === SPACE || bytes[p] === TAB) && bytes[p] !== delimiter) p++;
  return p;
}

/** Whether there is nothing but blanks in `bytes[from, to)`. An empty field in quotes is something. */
export function isBlank(bytes: Uint8Array, from: number, to: number): boolean {
  return skipBlanks(bytes, from, to, -1) === to;
}

/** The end of `bytes[from, to)` without blanks. */
function trimmedEnd(bytes: Uint8Array, from: number, to: number): number {
  let end = to;
  while (end > from && (bytes[end - 1] === SPACE || bytes[end - 1] === TAB)) end--;
  return end;
}
