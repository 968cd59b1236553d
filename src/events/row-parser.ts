import type { Need } from './batch';
import type { BatchBuilder } from './batch-builder';
import { decode } from './dictionary';
import { Fields, trimmedEnd } from './fields';
import { identify } from './identity';
import { LONGEST_LINE } from './lines';
import { isMissing, parseNumber, readDecimal, readShort } from './number';

/** Where the columns of a delimited table stand: plain data, found once when the file is planned. */
export interface Layout {
  delimiter: number;
  /** Names of all columns, in order. */
  header: string[];
  /** Physical lines up to and with the header. */
  headerLines: number;
  /** The field of each need. */
  positions: number[];
}

const TAB = 9;
const LINE_FEED = 10;
const RETURN = 13;
const SPACE = 32;
const QUOTE = 34;

const SKIPPED = 0;
const NUMBER = 1;
const OTHER = 2;

/**
 * Turns lines of a delimited table into rows of a batch. Two ways through a line: the quick one reads each byte once and
 * gives up at anything unusual; the careful one then reads that line again, and alone decides what is rejected and why.
 */
export class RowParser {
  /** Physical lines passed. */
  place = 0;
  private readonly kinds: Uint8Array;
  private readonly needsOf: number[][];
  /** 1 for a field that held a number too long for the quickest way. */
  private readonly long: Uint8Array;
  /** 1 for each byte at which a plain field ends or is no longer plain, and for each that is set aside around one. */
  private readonly stops = new Uint8Array(256);
  /** The highest byte that may end a field: most bytes of a table are above it, and need no look into `stops`. */
  private readonly highest: number;
  private readonly blanks = new Uint8Array(256);
  private readonly fields: Fields;
  /** Fields of any need; those of them that are not just one number; those of these that are a number too. */
  private readonly needed: number[];
  private readonly others: number[];
  private readonly mixed: number[];

  /** The first `linesToSkip` lines are passed over. */
  constructor(
    private readonly layout: Layout,
    private readonly needs: readonly Need[],
    private readonly builder: BatchBuilder,
    private linesToSkip: number,
  ) {
    const { header, positions, delimiter } = layout;
    this.needsOf = header.map((_, field) => needs.flatMap((_need, i) => (positions[i] === field ? [i] : [])));
    this.kinds = Uint8Array.from(this.needsOf, (list) => {
      if (list.length === 0) return SKIPPED;
      return list.length === 1 && needs[list[0]].as === 'number' ? NUMBER : OTHER;
    });
    this.needed = header.flatMap((_, field) => (this.needsOf[field].length > 0 ? [field] : []));
    this.others = this.needed.filter((field) => this.kinds[field] === OTHER);
    this.mixed = this.others.filter((field) => this.needsOf[field].some((i) => needs[i].as === 'number'));
    this.fields = new Fields(header.length);
    this.long = new Uint8Array(header.length);
    for (const blank of [SPACE, TAB]) this.blanks[blank] = blank === delimiter ? 0 : 1;
    for (const stop of [delimiter, LINE_FEED, RETURN, QUOTE]) this.stops[stop] = 1;
    this.highest = this.stops.lastIndexOf(1);
  }

  /** Parses whole lines of `bytes[from, to)` until the builder is full; where it stopped. */
  parse(bytes: Uint8Array, from: number, to: number): number {
    let line = from;
    while (line < to && !this.builder.full) {
      if (this.linesToSkip > 0) {
        this.linesToSkip--;
        this.place++;
        line = bytes.indexOf(LINE_FEED, line) + 1;
        continue;
      }
      line = this.quickly(bytes, line, to);
      if (line < to && !this.builder.full) line = this.carefully(bytes, line);
    }
    return line;
  }

  /**
   * Parses lines as long as nothing about them is unusual; the begin of the first line not parsed. Every loop below ends
   * at a line feed at the latest, which stands at `to - 1`.
   */
  private quickly(bytes: Uint8Array, from: number, to: number): number {
    const { kinds, needsOf, stops, blanks, long, builder } = this;
    const { numbers, places, capacity } = builder;
    const { delimiter } = this.layout;
    const { highest } = this;
    const { starts, ends } = this.fields;
    const last = kinds.length - 1;
    let { rows } = builder;
    let { place } = this;
    let line = from;
    lines: while (line < to && rows < capacity) {
      let p = line;
      for (let field = 0; ; field++) {
        if (kinds[field] === SKIPPED) {
          if (bytes[p] === QUOTE) p = behindQuoted(bytes, p);
          else p = nextStop(bytes, p, highest, stops);
        } else if (kinds[field] === NUMBER) {
          while (blanks[bytes[p]] !== 0) p++;
          const begin = p;
          const into = numbers[needsOf[field][0]];
          if (long[field] === 0) p = readShort(bytes, begin, into, rows);
          if (p === begin) {
            p = readDecimal(bytes, begin, to, into, rows);
            // One long number foretells others: none of them is to be read twice.
            if (p > begin) long[field] = 1;
          }
          if (p === begin || stops[bytes[p]] === 0) {
            while (stops[bytes[p]] === 0) p++;
            const end = trimmedEnd(bytes, begin, p);
            const value = parseNumber(bytes, begin, end);
            if (value !== value && !isMissing(bytes, begin, end)) break lines;
            into[rows] = value;
          }
        } else {
          while (blanks[bytes[p]] !== 0) p++;
          starts[field] = p;
          if (bytes[p] === QUOTE) p = behindQuoted(bytes, p);
          else while (stops[bytes[p]] === 0) p++;
          ends[field] = p;
        }
        if (field === last) break;
        if (bytes[p] !== delimiter) break lines;
        p++;
      }
      // A line of a one-column table that ends in a blank may be blank altogether.
      if (last === 0 && bytes[p - 1] <= SPACE) break;
      if (p - line > LONGEST_LINE) break;
      if (bytes[p] === RETURN) p++;
      if (bytes[p] !== LINE_FEED || !this.fillOthers(bytes, rows)) break;
      line = p + 1;
      places[rows++] = ++place;
    }
    builder.rows = rows;
    this.place = place;
    return line;
  }

  /** Writes the fields left to the end of a quick line; false where a number was wanted and there is none. */
  private fillOthers(bytes: Uint8Array, row: number): boolean {
    const { starts, ends } = this.fields;
    const { others, mixed } = this;
    for (let i = 0; i < others.length; i++) unquote(bytes, others[i], starts, ends);
    for (let i = 0; i < mixed.length; i++) if (!this.fillNumbers(bytes, mixed[i], row)) return false;
    for (let i = 0; i < others.length; i++) this.fillTexts(bytes, others[i], row);
    return true;
  }

  /** Writes a field for each need of a number; false where it is none. */
  private fillNumbers(bytes: Uint8Array, field: number, row: number): boolean {
    const from = this.fields.starts[field];
    const to = this.fields.ends[field];
    for (const i of this.needsOf[field]) {
      if (this.needs[i].as !== 'number') continue;
      const value = parseNumber(bytes, from, to);
      if (value !== value && !isMissing(bytes, from, to)) return false;
      this.builder.numbers[i][row] = value;
    }
    return true;
  }

  /** Writes a field for each need of a label or identity: last, for a label once met stays. */
  private fillTexts(bytes: Uint8Array, field: number, row: number): void {
    const { codes, high, low, dictionaries } = this.builder;
    const from = this.fields.starts[field];
    const to = this.fields.ends[field];
    for (const i of this.needsOf[field]) {
      const { as } = this.needs[i];
      if (as === 'text') codes[i][row] = dictionaries[i].code(bytes, from, to);
      else if (as === 'identity') identify(bytes, from, to, high[i], low[i], row);
    }
  }

  /** Parses the one line that begins at `from`: a row, a reject, or nothing where it is blank. Where the next begins. */
  private carefully(bytes: Uint8Array, from: number): number {
    const feed = bytes.indexOf(LINE_FEED, from);
    const to = feed > from && bytes[feed - 1] === RETURN ? feed - 1 : feed;
    const place = ++this.place;
    const { builder } = this;
    if (to - from > LONGEST_LINE) {
      builder.reject(place, null, `more than ${LONGEST_LINE} bytes`, 'line too long');
      return feed + 1;
    }
    const { header, delimiter } = this.layout;
    const found = this.fields.cut(bytes, from, to, delimiter);
    if (isBlank(this.fields, found)) return feed + 1;
    if (found < 0) {
      builder.reject(place, header[-1 - found] ?? null, excerpt(bytes, from, to), 'quote not closed');
    } else if (found !== header.length) {
      const reason = found < header.length ? 'too few fields' : 'too many fields';
      builder.reject(place, null, `${found} found, ${header.length} expected`, reason);
    } else this.finishRow(bytes, place);
    return feed + 1;
  }

  private finishRow(bytes: Uint8Array, place: number): void {
    const { fields, builder, needed } = this;
    for (const field of needed) {
      if (!this.fillNumbers(bytes, field, builder.rows)) {
        const value = excerpt(bytes, fields.starts[field], fields.ends[field]);
        builder.reject(place, this.layout.header[field], value, 'not a number');
        return;
      }
    }
    for (const field of needed) this.fillTexts(bytes, field, builder.rows);
    builder.places[builder.rows++] = place;
  }
}

/**
 * The place behind the quoted field that opens at `open`; `open` itself where a doubled quote or the line's end comes
 * first: no field ends there, so that the line is left to the careful way.
 */
function behindQuoted(bytes: Uint8Array, open: number): number {
  let p = open + 1;
  while (bytes[p] !== QUOTE && bytes[p] !== LINE_FEED) p++;
  return bytes[p] === QUOTE && bytes[p + 1] !== QUOTE ? p + 1 : open;
}

/** Sets aside the quotes around a field, and the blanks at its ends. */
function unquote(bytes: Uint8Array, field: number, starts: Int32Array, ends: Int32Array): void {
  const quoted = bytes[starts[field]] === QUOTE && ends[field] > starts[field];
  let from = quoted ? starts[field] + 1 : starts[field];
  const to = trimmedEnd(bytes, from, quoted ? ends[field] - 1 : ends[field]);
  while (from < to && (bytes[from] === SPACE || bytes[from] === TAB)) from++;
  starts[field] = from;
  ends[field] = to;
}

function isBlank(fields: Fields, found: number): boolean {
  return found === 1 && fields.starts[0] === fields.ends[0];
}

const LONGEST_EXCERPT = 100;

function excerpt(bytes: Uint8Array, from: number, to: number): string {
  return decode(bytes.subarray(from, Math.min(to, from + LONGEST_EXCERPT)));
}

/** The place of the first byte from `p` on that may end a field. */
function nextStop(bytes: Uint8Array, p: number, highest: number, stops: Uint8Array): number {
  let byte = bytes[p];
  while (byte > highest || stops[byte] === 0) byte = bytes[++p];
  return p;
}
