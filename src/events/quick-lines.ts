import { Assembly, Layout, whereGranted } from '../numerics/assembly';
import { LONGEST_LINE, ROOM } from './lines';
import code from './quick-lines.as?assembly';

/** What the quick way does with a field: passes over it, reads its number, or leaves it to the caller. */
export const SKIPPED = 0;
export const NUMBER = 1;
export const OTHER = 2;

/** A field left to the caller: row, field, and its bytes `[begin, end)`, quotes and the blanks at its ends set aside. */
export const LEFTOVER = 4;

/** Bytes whose stops are found at a time: their list stays in the first-level cache. */
const STRETCH = 8192;
/** Room in a stretch for each field more: lines of ordinary numbers fit whole, however many columns there are. */
const STRETCH_A_FIELD = 32;
/**
 * Where the quick way gets fewer lines than this, it costs more than it saves: the next ones are not tried, twice as many each
 * time.
 */
const FEW = 16;
const LONGEST_PAUSE = 255;
/** Bytes that may be read before and behind the lines. */
const MARGIN = 64;
/** Powers of ten that are exact as doubles, from 10^0. */
const POWERS = 23;

interface Exports {
  begin(...facts: number[]): void;
  parse(from: number, to: number, firstRow: number): number;
  rows: WebAssembly.Global;
  left: WebAssembly.Global;
}

const assembly = new Assembly<Exports>(code);
/** Memories given back: a file is read in many units, and each memory takes gigabytes of addresses. */
const spares: WebAssembly.Memory[] = [];

/**
 * The quick way through lines of a delimited table (`quick-lines.as.ts`), and the memory it works in. A line is usual
 * that has the right number of fields, no doubled quote, and nothing around a quoted field.
 */
export class QuickLines {
  /** Where the lines must stand. */
  readonly room: Buffer;
  /** The kind of each field. One that is not `SKIPPED` may become another that is not. */
  readonly kinds: Uint8Array;
  /** Where the numbers of each field are put, one a row; empty for fields that are skipped. */
  readonly numbers: Float64Array[];
  /** Where each line began in `room`; one a row. */
  readonly begins: Int32Array;
  /** The fields left to the caller, `LEFTOVER` entries each, in the order of the lines. */
  readonly leftovers: Int32Array;
  /** Rows after the last call of `parse`, those before it included; and its leftovers. */
  rows = 0;
  left = 0;
  private pause = 0;
  private untried = 0;
  private readonly memory: WebAssembly.Memory;
  private readonly exports: Exports;

  /**
   * For a table whose fields are of the given kinds, `capacity` rows at a time. `null` where the system grants no memory
   * for it.
   */
  static over(kinds: Uint8Array, delimiter: number, capacity: number): QuickLines | null {
    return whereGranted(() => new QuickLines(kinds, delimiter, capacity));
  }

  private constructor(kinds: Uint8Array, delimiter: number, capacity: number) {
    const stretch = Math.min(LONGEST_LINE, STRETCH + STRETCH_A_FIELD * kinds.length);
    const needed = kinds.filter((kind) => kind !== SKIPPED).length;
    const layout = new Layout(0, MARGIN);
    const roomAt = layout.place(ROOM + 2 * MARGIN) + MARGIN;
    const kindsAt = layout.place(kinds.length);
    const targetsAt = layout.place(4 * kinds.length);
    const powersAt = layout.place(8 * POWERS);
    // One stop more than there can be: they are written by twos.
    const stopsAt = layout.place(4 * (stretch + 1));
    const beginsAt = layout.place(4 * capacity);
    const leftoversAt = layout.place(4 * LEFTOVER * needed * capacity);
    const targets = Array.from(kinds, (kind) => (kind === SKIPPED ? 0 : layout.place(8 * capacity)));

    this.memory = layout.over(spares.pop());
    const { buffer } = this.memory;
    this.room = Buffer.from(buffer, roomAt, ROOM);
    this.numbers = targets.map((at) => new Float64Array(buffer, at, at === 0 ? 0 : capacity));
    this.begins = new Int32Array(buffer, beginsAt, capacity);
    this.leftovers = new Int32Array(buffer, leftoversAt, LEFTOVER * needed * capacity);
    this.kinds = new Uint8Array(buffer, kindsAt, kinds.length);
    this.kinds.set(kinds);
    new Uint32Array(buffer, targetsAt, kinds.length).set(targets);
    new Float64Array(buffer, powersAt, POWERS).set(Array.from({ length: POWERS }, (_, k) => Number(`1e${k}`)));
    this.exports = assembly.in(this.memory);
    this.exports.begin(
      kinds.length,
      delimiter,
      capacity,
      stretch,
      roomAt,
      kindsAt,
      targetsAt,
      stopsAt,
      beginsAt,
      leftoversAt,
      powersAt,
    );
  }

  /**
   * Parses whole lines of `room[from, to)` into rows from `row` on while there is room and nothing about them is unusual;
   * the begin of the first line not parsed, which is for the careful way.
   */
  parse(from: number, to: number, row: number): number {
    this.rows = row;
    this.left = 0;
    if (this.untried > 0) {
      this.untried--;
      return from;
    }
    const line = this.exports.parse(from, to, row);
    this.rows = this.exports.rows.value as number;
    this.left = this.exports.left.value as number;
    this.pause = line < to && this.rows - row < FEW ? Math.min(2 * this.pause + 1, LONGEST_PAUSE) : 0;
    this.untried = this.pause;
    return line;
  }

  /** Gives the memory back: nothing of it may be used after this. */
  close(): void {
    spares.push(this.memory);
  }
}
