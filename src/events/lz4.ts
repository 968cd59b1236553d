import { InputError } from '../study/input-error';
import { wordAt } from './word';
import { xxHash32 } from './xxhash32';

const FRAME_MAGIC = 0x184d2204;
const SKIPPABLE_MAGIC = 0x184d2a50;
const SKIPPABLE_MASK = 0xfffffff0;
/** Bits of the first byte of a frame's description. */
const VERSION_MASK = 0b1100_0000;
const VERSION = 0b0100_0000;
const INDEPENDENT = 0b0010_0000;
const BLOCK_CHECKSUM = 0b0001_0000;
const CONTENT_SIZE = 0b0000_1000;
const CONTENT_CHECKSUM = 0b0000_0100;
const RESERVED = 0b0000_0010;
const DICTIONARY = 0b0000_0001;
/** The high bit of a block's size: it is stored as it is. */
const STORED = 0x80000000;
const LEAST_MATCH = 4;
/** A length of this many is continued in further bytes. */
const CONTINUED = 15;
const REMEDY = 'copy or make the file again';

/**
 * The content of LZ4 frames, one behind the other, at most `most` bytes (the published "LZ4 Frame Format" 1.6.1 and "LZ4 Block
 * Format" descriptions; every size and checksum is looked at). Throws `InputError` with the place of a damage; `name` names the
 * file in errors. Own code, because no kept library decodes the frames that Arrow's writers make.
 */
export function unlz4(bytes: Uint8Array, name: string, most: number): Uint8Array {
  return new Lz4(bytes, name, most).content();
}

class Lz4 {
  private at = 0;
  private out = new Uint8Array(0);
  private made = 0;

  constructor(
    private readonly bytes: Uint8Array,
    private readonly name: string,
    private readonly most: number,
  ) {}

  content(): Uint8Array {
    while (this.at < this.bytes.length) this.frame();
    return this.out.subarray(0, this.made);
  }

  private frame(): void {
    const magic = this.word();
    if ((magic & SKIPPABLE_MASK) >>> 0 === SKIPPABLE_MAGIC) {
      this.take(this.word());
      return;
    }
    if (magic !== FRAME_MAGIC) throw this.damaged('no LZ4 frame begins there', this.at - 4);
    const { flags, largest, size } = this.description();
    const start = this.made;
    for (let block = this.word(); block !== 0; block = this.word()) this.block(block, flags, largest, start);
    if (flags & CONTENT_CHECKSUM && this.word() !== xxHash32(this.out, start, this.made)) {
      throw this.damaged('its checksum does not hold', this.at - 4);
    }
    if (size !== null && size !== this.made - start) {
      throw this.damaged(`${this.made - start} bytes where ${size} are told`, this.at);
    }
  }

  private description(): { flags: number; largest: number; size: number | null } {
    const from = this.at;
    const [flags, descriptor] = this.bytes.subarray(this.take(2), this.at);
    if ((flags & VERSION_MASK) !== VERSION || flags & RESERVED) throw this.damaged('an unknown sort of frame', from);
    if (flags & DICTIONARY) throw this.damaged('a frame that needs a dictionary', from);
    const size = flags & CONTENT_SIZE ? this.word() + this.word() * 2 ** 32 : null;
    if (((xxHash32(this.bytes, from, this.at) >>> 8) & 0xff) !== this.bytes[this.take(1)]) {
      throw this.damaged('the checksum of its description does not hold', from);
    }
    // 4 to 7 stand for 64 KiB to 4 MiB.
    const largest = 2 ** (8 + 2 * ((descriptor >> 4) & 7));
    if (largest < 65_536) throw this.damaged('an unknown size of blocks', from);
    return { flags, largest, size };
  }

  private block(head: number, flags: number, largest: number, frameStart: number): void {
    const length = head & ~STORED;
    if (length > largest) throw this.damaged(`a block of ${length} bytes`, this.at - 4);
    const from = this.take(length);
    if (flags & BLOCK_CHECKSUM && this.word() !== xxHash32(this.bytes, from, from + length)) {
      throw this.damaged('the checksum of a block does not hold', from);
    }
    this.makeRoom(largest);
    const start = this.made;
    if (head & STORED) {
      this.out.set(this.bytes.subarray(from, from + length), start);
      this.made += length;
    } else this.sequences(from, from + length, flags & INDEPENDENT ? start : frameStart, start + largest);
    if (this.made > this.most) {
      throw new InputError(this.name, `LZ4 data that grow beyond ${this.most} bytes`, 'write smaller pieces');
    }
  }

  /** Decodes a block: literals and matches in turn, literals last. Matches reach back to `first`; nothing is made from `limit` on. */
  private sequences(from: number, to: number, first: number, limit: number): void {
    const { bytes, out } = this;
    let p = from;
    let made = this.made;
    const length = (start: number): number => {
      let sum = start;
      if (start !== CONTINUED) return sum;
      for (let byte = 255; byte === 255; sum += byte) {
        if (p >= to) throw this.damaged('a block that breaks off', p);
        byte = bytes[p++];
      }
      return sum;
    };
    while (p < to) {
      const token = bytes[p++];
      const literals = length(token >> 4);
      if (p + literals > to || made + literals > limit) throw this.damaged('literals beyond their block', p);
      out.set(bytes.subarray(p, p + literals), made);
      p += literals;
      made += literals;
      if (p === to) break;
      if (p + 2 > to) throw this.damaged('a block that breaks off', p);
      const back = bytes[p] | (bytes[p + 1] << 8);
      p += 2;
      const match = length(token & CONTINUED) + LEAST_MATCH;
      if (back === 0 || made - back < first) throw this.damaged('a match before its beginning', p);
      if (made + match > limit) throw this.damaged('a match beyond its block', p);
      // Byte by byte: a match may overlap what it makes.
      for (let end = made + match; made < end; made++) out[made] = out[made - back];
    }
    this.made = made;
  }

  private makeRoom(more: number): void {
    if (this.made + more <= this.out.length) return;
    const larger = new Uint8Array(Math.max(this.made + more, 2 * this.out.length));
    larger.set(this.out.subarray(0, this.made));
    this.out = larger;
  }

  /** The next four bytes as an unsigned integer. */
  private word(): number {
    return wordAt(this.bytes, this.take(4)) >>> 0;
  }

  /** Passes over `count` bytes; where they began. */
  private take(count: number): number {
    const from = this.at;
    if (count > this.bytes.length - from) throw this.damaged('the LZ4 data break off', this.bytes.length);
    this.at = from + count;
    return from;
  }

  private damaged(why: string, place: number): InputError {
    return new InputError(this.name, `damaged LZ4 data at byte ${place} of a buffer (${why})`, REMEDY);
  }
}
