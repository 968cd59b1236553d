import type { Need } from './batch';
import type { BatchBuilder } from './batch-builder';
import { decode } from './dictionary';
import { Fields, isBlank } from './fields';
import { identify } from './identity';
import type { LineParser } from './line-units';
import { LONGEST_LINE } from './lines';
import { isMissing, parseNumber } from './number';
import { LEFTOVER, NUMBER, OTHER, QuickLines, SKIPPED } from './quick-lines';

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

const LINE_FEED = 10;
const RETURN = 13;

/**
 * Turns lines of a delimited table into rows of a batch. Two ways through a line: the quick one gives up at anything
 * unusual; the careful one then reads that line again, and alone decides what is rejected and why.
 */
export class RowParser implements LineParser {
  /** Physical lines passed. */
  place = 0;
  private readonly needsOf: number[][];
  private readonly kinds: Uint8Array;
  private readonly fields: Fields;
  /** Fields of any need. */
  private readonly needed: number[];
  /** 1 for each field of which a number is needed, and for each of which a text. */
  private readonly asNumber: Uint8Array;
  private readonly asText: Uint8Array;
  /** `null` where the system grants no memory for it: then every line goes the careful way. */
  private readonly quick: QuickLines | null;

  /** The first `linesToSkip` lines are passed over. */
  constructor(
    private readonly layout: Layout,
    private readonly needs: readonly Need[],
    private readonly builder: BatchBuilder,
    private linesToSkip: number,
  ) {
    const { header, positions, delimiter } = layout;
    this.needsOf = header.map((_, field) => needs.flatMap((_need, i) => (positions[i] === field ? [i] : [])));
    this.asNumber = Uint8Array.from(this.needsOf, (list) => Number(list.some((i) => needs[i].as === 'number')));
    this.asText = Uint8Array.from(this.needsOf, (list) => Number(list.some((i) => needs[i].as !== 'number')));
    this.kinds = Uint8Array.from(this.needsOf, (list) => {
      if (list.length === 0) return SKIPPED;
      return list.length === 1 && needs[list[0]].as === 'number' ? NUMBER : OTHER;
    });
    this.needed = header.flatMap((_, field) => (this.needsOf[field].length > 0 ? [field] : []));
    this.fields = new Fields(header.length);
    this.quick = QuickLines.over(this.kinds, delimiter, builder.capacity);
    this.kinds.forEach((kind, field) => {
      if (this.quick && kind === NUMBER) builder.numbers[this.needsOf[field][0]] = this.quick.numbers[field];
    });
  }

  get room(): Buffer | undefined {
    return this.quick?.room;
  }

  close(): void {
    this.quick?.close();
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
      if (this.quick) line = this.quickly(this.quick, bytes, line, to);
      if (line < to && !this.builder.full) line = this.carefully(bytes, line);
    }
    return line;
  }

  /** Parses lines as long as nothing about them is unusual; the begin of the first line not parsed. */
  private quickly(quick: QuickLines, bytes: Uint8Array, from: number, to: number): number {
    const { builder } = this;
    let line = quick.parse(from, to, builder.rows);
    let { rows } = quick;
    const bad = this.fillLeftNumbers(quick, bytes);
    if (bad >= 0) {
      rows = bad;
      line = quick.begins[bad];
    }
    this.fillLeftTexts(quick, bytes, rows);
    while (builder.rows < rows) builder.places[builder.rows++] = ++this.place;
    return line;
  }

  /** Writes the numbers that the quick way left; the first row that lacks one, -1 where none does. */
  private fillLeftNumbers({ left, leftovers }: QuickLines, bytes: Uint8Array): number {
    const { asNumber } = this;
    for (let at = 0; at < left * LEFTOVER; at += LEFTOVER) {
      const field = leftovers[at + 1];
      if (asNumber[field] === 0) continue;
      const row = leftovers[at];
      if (!this.fillNumbers(bytes, field, leftovers[at + 2], leftovers[at + 3], row)) return row;
    }
    return -1;
  }

  /** Writes the labels and identities of rows before `rows` that the quick way left: last, for a label once met stays. */
  private fillLeftTexts({ left, leftovers }: QuickLines, bytes: Uint8Array, rows: number): void {
    const { asText } = this;
    for (let at = 0; at < left * LEFTOVER && leftovers[at] < rows; at += LEFTOVER) {
      const field = leftovers[at + 1];
      if (asText[field] === 0) continue;
      this.fillTexts(bytes, field, leftovers[at + 2], leftovers[at + 3], leftovers[at]);
    }
  }

  /** Writes a field for each need of a number; false where it is none. */
  private fillNumbers(bytes: Uint8Array, field: number, from: number, to: number, row: number): boolean {
    for (const i of this.needsOf[field]) {
      if (this.needs[i].as !== 'number') continue;
      const value = parseNumber(bytes, from, to);
      if (value !== value && !isMissing(bytes, from, to)) return false;
      this.builder.numbers[i][row] = value;
    }
    return true;
  }

  /** Writes a field for each need of a label or identity. */
  private fillTexts(bytes: Uint8Array, field: number, from: number, to: number, row: number): void {
    const { codes, high, low, dictionaries } = this.builder;
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
    if (found === 1 && isBlank(bytes, from, to)) return feed + 1;
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
      const [from, to] = [fields.starts[field], fields.ends[field]];
      if (!this.fillNumbers(bytes, field, from, to, builder.rows)) {
        const value = excerpt(bytes, from, to);
        builder.reject(place, this.layout.header[field], value, 'not a number');
        return;
      }
    }
    for (const field of needed) {
      this.fillTexts(bytes, field, fields.starts[field], fields.ends[field], builder.rows);
    }
    builder.places[builder.rows++] = place;
  }
}

const LONGEST_EXCERPT = 100;

function excerpt(bytes: Uint8Array, from: number, to: number): string {
  return decode(bytes.subarray(from, Math.min(to, from + LONGEST_EXCERPT)));
}
