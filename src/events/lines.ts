import { InputError } from '../study/input-error';
import type { ByteSource } from './byte-source';
import { openFile, readAt } from './byte-source';
import { closeSync } from 'node:fs';

/** A longer line is rejected unread: no event list has such lines, and memory stays bounded. */
export const LONGEST_LINE = 1_048_576;

/** Bytes asked for at a time: small enough for the second-level cache. */
const STEP = 262_144;
const LINE_FEED = 10;

/** Bytes that `LineBlocks` works in: a longest line, a step behind it, and a line feed that the file may lack. */
export const ROOM = LONGEST_LINE + STEP + 2;

/** Whole lines, each ended by a line feed, in `bytes[0, to)`. The bytes are overwritten by the next block. */
export interface Block {
  bytes: Uint8Array;
  to: number;
}

/**
 * Cuts a stream of bytes into blocks of whole lines. A last line without a line feed gets one. A line longer than
 * `LONGEST_LINE` arrives cut to one byte more than that, so that its reader can tell. Works in `bytes`, of length `ROOM`.
 * Throws `InputError` at a NUL byte: no text table holds one.
 */
export class LineBlocks {
  private to = 0;
  private filled = 0;
  private passed = 0;

  constructor(
    private readonly source: ByteSource,
    private readonly name: string,
    private readonly bytes: Buffer = Buffer.allocUnsafe(ROOM),
  ) {}

  async next(): Promise<Block | null> {
    this.bytes.copyWithin(0, this.to, this.filled);
    this.filled -= this.to;
    for (;;) {
      const begin = this.filled;
      const got = await this.source.fill(this.bytes.subarray(begin, begin + STEP));
      if (got === 0) return this.last();
      this.filled += got;
      this.refuseBinary(begin);
      this.cutFirstLine(begin);
      this.to = this.bytes.subarray(0, this.filled).lastIndexOf(LINE_FEED) + 1;
      if (this.to > 0) return { bytes: this.bytes, to: this.to };
    }
  }

  private last(): Block | null {
    if (this.filled === 0) return null;
    this.bytes[this.filled++] = LINE_FEED;
    this.to = this.filled;
    return { bytes: this.bytes, to: this.to };
  }

  private refuseBinary(begin: number): void {
    const nul = this.bytes.subarray(begin, this.filled).indexOf(0);
    if (nul >= 0) {
      const what = `not a text table: a NUL byte at byte ${this.passed + nul}`;
      throw new InputError(this.name, what, 'give a table as UTF-8 text, or a format Entasis knows by its content');
    }
    this.passed += this.filled - begin;
  }

  /** Drops what a too long first line has beyond its limit; `begin` is where the new bytes begin. */
  private cutFirstLine(begin: number): void {
    const most = LONGEST_LINE + 1;
    if (this.filled <= most) return;
    if (begin <= most && this.bytes.subarray(0, most).includes(LINE_FEED)) return;
    const feed = this.bytes.subarray(0, this.filled).indexOf(LINE_FEED, most);
    const rest = feed < 0 ? this.filled : feed;
    this.bytes.copyWithin(most, rest, this.filled);
    this.filled -= rest - most;
  }
}

/** The begin of the first line that begins at or after `position`; the file's size where none does. */
export function lineStart(path: string, name: string, position: number, size: number): number {
  if (position <= 0) return 0;
  const file = openFile(path, name);
  const bytes = Buffer.allocUnsafe(65_536);
  try {
    for (let at = position - 1; at < size;) {
      const got = readAt(file, bytes, bytes.length, at, name);
      if (got === 0) break;
      const feed = bytes.subarray(0, got).indexOf(LINE_FEED);
      if (feed >= 0) return at + feed + 1;
      at += got;
    }
    return size;
  } finally {
    closeSync(file);
  }
}
