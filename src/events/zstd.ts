import { Decompress } from 'fzstd';
import { InputError } from '../study/input-error';
import { firstBytes, MemoryBytes, type ByteSource, type SyncBytes } from './byte-source';
import { XxHash64 } from './xxhash64';

const FRAME_MAGIC = 0xfd2fb528;
const SKIPPABLE_MAGIC = 0x184d2a50;
const SKIPPABLE_MASK = 0xfffffff0;
/** Largest window accepted: what the reference decoder accepts by itself (2^27, RFC 8878 3.1.1.1.2 leaves it open). */
const LARGEST_WINDOW = 2 ** 27;
/** RFC 8878 3.1.1.2.4: no block holds or makes more. */
const LARGEST_BLOCK = 131_072;
const REMEDY = 'copy or make the file again';

interface Frame {
  start: number;
  decoder: Decompress;
  checked: boolean;
  contentSize: number | null;
  made: number;
  hash: XxHash64;
}

/**
 * Zstd data (RFC 8878), of any number of frames. The blocks are decoded by fzstd; the frames are walked here, because
 * fzstd looks neither at checksums nor at content sizes nor at how much memory a window asks for, and tells no place.
 */
export class ZstdBytes implements ByteSource {
  private readonly ready: Uint8Array[] = [];
  private frame: Frame | null = null;

  /** `input` are the compressed bytes, `name` names the file in errors. */
  constructor(
    private readonly input: SyncBytes,
    private readonly name: string,
  ) {}

  get consumed(): number {
    return this.input.consumed;
  }

  fill(into: Uint8Array): number {
    while (this.ready.length === 0) if (!this.advance()) return 0;
    const chunk = this.ready[0];
    const got = Math.min(into.length, chunk.length);
    into.set(chunk.subarray(0, got));
    if (got < chunk.length) this.ready[0] = chunk.subarray(got);
    else this.ready.shift();
    return got;
  }

  close(): void {
    this.input.close();
  }

  /** Reads the next frame header or block; false at the end of the file. */
  private advance(): boolean {
    if (this.frame !== null) {
      this.readBlock(this.frame);
      return true;
    }
    const start = this.input.consumed;
    const magic = this.take(4, true);
    if (magic === null) return false;
    const value = littleEndian(magic, 0, 4);
    if ((value & SKIPPABLE_MASK) >>> 0 === SKIPPABLE_MAGIC) this.skip(littleEndian(this.need(4), 0, 4));
    else if (value === FRAME_MAGIC) this.frame = this.readHeader(magic, start);
    else throw this.damage(start, 'no zstd frame begins here');
    return true;
  }

  private readHeader(magic: Uint8Array, start: number): Frame {
    const descriptor = this.need(1);
    const single = (descriptor[0] & 32) !== 0;
    const sizeBytes = descriptor[0] >> 6 ? 1 << (descriptor[0] >> 6) : single ? 1 : 0;
    const dictionaryBytes = [0, 1, 2, 4][descriptor[0] & 3];
    const windowByte = this.need(single ? 0 : 1);
    const dictionary = this.need(dictionaryBytes);
    const size = this.need(sizeBytes);
    const content = sizeBytes === 0 ? null : littleEndian(size, 0, sizeBytes) + (sizeBytes === 2 ? 256 : 0);
    const window = single ? content! : windowSize(windowByte[0]);
    if (window > LARGEST_WINDOW) {
      throw new InputError(this.name, 'zstd window over 128 MiB', 'compress the file again without --long or --ultra');
    }
    if (littleEndian(dictionary, 0, dictionaryBytes) !== 0) {
      throw new InputError(this.name, 'zstd frame that needs a dictionary', 'compress the file again without one');
    }
    const frame: Frame = {
      start,
      decoder: new Decompress((chunk) => this.receive(frame, chunk)),
      checked: (descriptor[0] & 4) !== 0,
      contentSize: content,
      made: 0,
      hash: new XxHash64(),
    };
    this.push(frame, Buffer.concat([magic, descriptor, windowByte, dictionary, size]), false);
    return frame;
  }

  private receive(frame: Frame, chunk: Uint8Array): void {
    if (chunk.length === 0) return;
    frame.made += chunk.length;
    if (frame.checked) frame.hash.update(chunk);
    // fzstd overwrites its buffers with the next block.
    this.ready.push(chunk.slice());
  }

  private readBlock(frame: Frame): void {
    const place = this.input.consumed;
    const header = this.need(3);
    const bits = littleEndian(header, 0, 3);
    const last = (bits & 1) === 1;
    const type = (bits >> 1) & 3;
    const size = bits >> 3;
    if (type === 3 || size > LARGEST_BLOCK) throw this.damage(place, 'no block looks like this');
    const body = this.need(type === 1 ? 1 : size);
    const checksum = this.need(last && frame.checked ? 4 : 0);
    this.push(frame, Buffer.concat([header, body, checksum]), last, place);
    if (last) this.finish(frame, checksum);
  }

  private finish(frame: Frame, checksum: Uint8Array): void {
    this.frame = null;
    const { start } = frame;
    if (frame.checked && frame.hash.digest().low !== littleEndian(checksum, 0, 4)) {
      throw this.damage(start, 'the checksum of the frame that begins here does not match');
    }
    if (frame.contentSize !== null && frame.contentSize !== frame.made) {
      throw this.damage(start, `the frame that begins here holds ${frame.made} bytes, not ${frame.contentSize}`);
    }
  }

  private push(frame: Frame, bytes: Uint8Array, last: boolean, place = frame.start): void {
    try {
      frame.decoder.push(bytes, last);
    } catch (cause) {
      throw this.damage(place, (cause as Error).message, cause);
    }
  }

  private skip(bytes: number): void {
    for (let left = bytes; left > 0; left -= LARGEST_BLOCK) this.need(Math.min(left, LARGEST_BLOCK));
  }

  private need(count: number): Uint8Array {
    return this.take(count, false)!;
  }

  /** Exactly `count` bytes; `null` where none is left and that is allowed. Throws `InputError` where fewer are left. */
  private take(count: number, mayEnd: boolean): Uint8Array | null {
    const bytes = new Uint8Array(count);
    for (let filled = 0; filled < count;) {
      const got = this.input.fill(bytes.subarray(filled));
      if (got === 0) {
        if (filled === 0 && mayEnd) return null;
        const what = `truncated: the zstd data break off at byte ${this.input.consumed}`;
        throw new InputError(this.name, what, REMEDY);
      }
      filled += got;
    }
    return bytes;
  }

  private damage(place: number, why: string, cause?: unknown): InputError {
    return new InputError(this.name, `damaged zstd data at byte ${place} (${why})`, REMEDY, { cause });
  }
}

/** The bytes of whole frames held in memory. Throws `InputError` at a damage, and beyond `most` bytes. */
export function unzstd(bytes: Uint8Array, name: string, most: number): Uint8Array {
  const source = new ZstdBytes(new MemoryBytes(bytes), name);
  const parts: Uint8Array[] = [];
  let length = 0;
  for (;;) {
    const part = new Uint8Array(LARGEST_BLOCK);
    const got = source.fill(part);
    if (got === 0) return Buffer.concat(parts, length);
    length += got;
    if (length > most) throw new InputError(name, `zstd data that grow beyond ${most} bytes`, 'write smaller pieces');
    parts.push(part.subarray(0, got));
  }
}

/** RFC 8878 3.1.1.1.2. */
function windowSize(descriptor: number): number {
  const base = 2 ** (10 + (descriptor >> 3));
  return base + (base / 8) * (descriptor & 7);
}

function littleEndian(bytes: Uint8Array, at: number, count: number): number {
  let value = 0;
  for (let i = count - 1; i >= 0; i--) value = value * 256 + bytes[at + i];
  return value;
}

/** True for a file that begins as zstd does, a skippable frame included. */
export function isZstd(path: string, name: string): boolean {
  const bytes = firstBytes(path, name, 4);
  if (bytes.length < 4) return false;
  const magic = littleEndian(bytes, 0, 4);
  return magic === FRAME_MAGIC || (magic & SKIPPABLE_MASK) >>> 0 === SKIPPABLE_MAGIC;
}
