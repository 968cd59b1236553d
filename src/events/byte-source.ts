import { closeSync, fstatSync, openSync, readSync } from 'node:fs';
import { InputError } from '../study/input-error';

/** Bytes of a file, decompressed where it is compressed, pulled in order. */
export interface ByteSource {
  /** Fills `into` from its start; how many bytes it got, 0 at the end. Throws `InputError` at a damage. */
  fill(into: Uint8Array): number | Promise<number>;
  /** Bytes of the file on disk behind what was handed out. */
  readonly consumed: number;
  close(): void;
}

/** A source that never waits. */
export interface SyncBytes extends ByteSource {
  fill(into: Uint8Array): number;
}

/** Bytes in memory. */
export class MemoryBytes implements SyncBytes {
  consumed = 0;

  constructor(private readonly bytes: Uint8Array) {}

  fill(into: Uint8Array): number {
    const got = Math.min(into.length, this.bytes.length - this.consumed);
    into.set(this.bytes.subarray(this.consumed, this.consumed + got));
    this.consumed += got;
    return got;
  }

  close(): void {}
}

/** Chunks as they arrive, handed out in pieces as large as they are asked for. */
export class Chunks {
  private rest: Uint8Array = new Uint8Array(0);

  /** `next` gives the next chunk, `null` at the end. */
  constructor(private readonly next: () => Promise<Uint8Array | null>) {}

  async fill(into: Uint8Array): Promise<number> {
    if (this.rest.length === 0) {
      const chunk = await this.next();
      if (chunk === null) return 0;
      this.rest = chunk;
    }
    const got = Math.min(into.length, this.rest.length);
    into.set(this.rest.subarray(0, got));
    this.rest = this.rest.subarray(got);
    return got;
  }
}

/** The bytes `[start, end)` of a file as they stand, read at once: no turn of the event loop a block. */
export class PlainBytes implements SyncBytes {
  private readonly file: number;
  private position: number;

  constructor(
    path: string,
    private readonly name: string,
    private readonly start = 0,
    private readonly end = Infinity,
  ) {
    this.file = openFile(path, name);
    this.position = start;
  }

  get consumed(): number {
    return this.position - this.start;
  }

  fill(into: Uint8Array): number {
    const most = Math.min(into.length, this.end - this.position);
    if (most <= 0) return 0;
    const got = readAt(this.file, into, most, this.position, this.name);
    this.position += got;
    return got;
  }

  close(): void {
    closeSync(this.file);
  }
}

/** Opens a file for reading. Throws `InputError` where it cannot be opened or is no file. */
export function openFile(path: string, name: string): number {
  let file: number;
  try {
    file = openSync(path, 'r');
  } catch (cause) {
    throw unreadable(name, cause);
  }
  if (fstatSync(file).isFile()) return file;
  closeSync(file);
  throw new InputError(name, 'is no file', 'name a file of events');
}

/** Reads up to `most` bytes at `position` into the start of `into`; how many came. */
export function readAt(file: number, into: Uint8Array, most: number, position: number, name: string): number {
  try {
    return readSync(file, into, 0, most, position);
  } catch (cause) {
    throw unreadable(name, cause);
  }
}

/** Size of a file in bytes. */
export function sizeOf(path: string, name: string): number {
  const file = openFile(path, name);
  try {
    return fstatSync(file).size;
  } finally {
    closeSync(file);
  }
}

/** The first bytes of a file, at most `most`. */
export function firstBytes(path: string, name: string, most: number): Uint8Array {
  const source = new PlainBytes(path, name, 0, most);
  try {
    const bytes = new Uint8Array(most);
    let filled = 0;
    for (let got = source.fill(bytes); got > 0; got = source.fill(bytes.subarray(filled))) filled += got;
    return bytes.subarray(0, filled);
  } finally {
    source.close();
  }
}

export function unreadable(name: string, cause: unknown): InputError {
  const { code, message } = cause as NodeJS.ErrnoException;
  const remedy = code === 'ENOENT' ? 'look for it or correct its name' : 'check its place and your rights to it';
  return new InputError(name, `cannot be read (${code ?? message})`, remedy, { cause });
}
