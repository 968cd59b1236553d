import { createReadStream, type ReadStream } from 'node:fs';
import { constants, createGunzip, type Gunzip } from 'node:zlib';
import { InputError } from '../study/input-error';
import { Chunks, firstBytes, PlainBytes, unreadable, type ByteSource } from './byte-source';

/** Bytes handed to the decoder at a time: a damage is placed to within as much. */
const STEP = 65_536;
const OUTPUT = 262_144;

/** A gzip file (RFC 1952), of any number of members, decompressed by Node's zlib beside the reading. */
export class GzipBytes implements ByteSource {
  private readonly input: ReadStream;
  private readonly gunzip: Gunzip;
  private readonly stream: AsyncIterator<Uint8Array>;
  private readonly chunks = new Chunks(() => this.nextChunk());

  constructor(
    private readonly path: string,
    private readonly name: string,
  ) {
    this.input = createReadStream(path, { highWaterMark: STEP });
    this.gunzip = createGunzip({ chunkSize: OUTPUT });
    this.input.on('error', (cause) => this.gunzip.destroy(unreadable(name, cause)));
    this.input.pipe(this.gunzip);
    this.stream = this.gunzip[Symbol.asyncIterator]() as AsyncIterator<Uint8Array>;
  }

  get consumed(): number {
    return this.gunzip.bytesWritten;
  }

  fill(into: Uint8Array): Promise<number> {
    return this.chunks.fill(into);
  }

  close(): void {
    this.input.destroy();
    this.gunzip.destroy();
  }

  private async nextChunk(): Promise<Uint8Array | null> {
    try {
      const { done, value } = await this.stream.next();
      if (!done) return value;
    } catch (cause) {
      throw cause instanceof InputError ? cause : this.damage(cause as NodeJS.ErrnoException);
    }
    this.checkEnd();
    return null;
  }

  /** zlib ends quietly at bytes that begin no further member: rows may be lost there unless they are mere padding. */
  private checkEnd(): void {
    const end = this.gunzip.bytesWritten;
    const behind = new PlainBytes(this.path, this.name, end);
    const bytes = new Uint8Array(STEP);
    try {
      for (let got = behind.fill(bytes); got > 0; got = behind.fill(bytes)) {
        if (bytes.subarray(0, got).some((byte) => byte !== 0)) {
          throw new InputError(this.name, `the gzip data end at byte ${end}, others follow`, REMEDY);
        }
      }
    } finally {
      behind.close();
    }
  }

  private damage(cause: NodeJS.ErrnoException): InputError {
    const place = this.gunzip.bytesWritten;
    const what =
      cause.errno === constants.Z_BUF_ERROR
        ? `truncated: the gzip data break off at byte ${place}`
        : `damaged gzip data at or soon after byte ${place} (${cause.message})`;
    return new InputError(this.name, what, REMEDY, { cause });
  }
}

const REMEDY = 'copy or make the file again';

/** True for a file that begins as gzip does. */
export function isGzip(path: string, name: string): boolean {
  const [first, second] = firstBytes(path, name, 2);
  return first === 0x1f && second === 0x8b;
}
