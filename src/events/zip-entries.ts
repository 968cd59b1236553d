import { crc32 } from 'node:zlib';
import { closeSync } from 'node:fs';
import type { Readable } from 'node:stream';
import { open, type Entry, type ZipFile } from 'yauzl';
import { InputError } from '../study/input-error';
import { Chunks, openFile, sizeOf, type ByteSource } from './byte-source';

/** More entries are no table of columns. */
const MOST_ENTRIES = 10_000;
/** No deflated data grow by more than 1032 times (RFC 1951: at best 258 bytes out of two bits), and a few bytes of frame. */
const MOST_GROWTH = 1032;
const FRAME = 1024;
const REMEDY = 'copy or make the file again';

/** A zip archive opened for reading: entries are decompressed as streams, and none is ever written anywhere. */
export class ZipEntries {
  private constructor(
    private readonly zip: ZipFile,
    private readonly name: string,
    /** By their names. */
    readonly entries: ReadonlyMap<string, Entry>,
  ) {}

  /** Throws `InputError` for a damaged archive, one with names that lead out of it, and one that is made to grow. */
  static async open(path: string, name: string): Promise<ZipEntries> {
    closeSync(openFile(path, name));
    let zip: ZipFile | null = null;
    try {
      zip = await opened(path);
      const entries = await listed(zip, name);
      checkSizes(entries, sizeOf(path, name), name);
      return new ZipEntries(zip, name, entries);
    } catch (cause) {
      zip?.close();
      throw cause instanceof InputError ? cause : damaged(name, cause);
    }
  }

  close(): void {
    this.zip.close();
  }

  /** The content of an entry. */
  async bytes(entry: Entry): Promise<EntryBytes> {
    try {
      return new EntryBytes(await streamed(this.zip, entry), entry, this.name);
    } catch (cause) {
      throw damaged(this.name, cause, entry);
    }
  }
}

/** The content of one entry, its checksum compared at the end. */
export class EntryBytes implements ByteSource {
  consumed = 0;
  private readonly content: AsyncIterator<Uint8Array>;
  private readonly chunks = new Chunks(() => this.next());
  private checksum = 0;

  constructor(
    private readonly stream: Readable,
    private readonly entry: Entry,
    private readonly name: string,
  ) {
    this.content = stream[Symbol.asyncIterator]() as AsyncIterator<Uint8Array>;
  }

  async fill(into: Uint8Array): Promise<number> {
    const got = await this.chunks.fill(into);
    this.consumed += got;
    return got;
  }

  close(): void {
    this.stream.destroy();
  }

  private async next(): Promise<Uint8Array | null> {
    let result: IteratorResult<Uint8Array>;
    try {
      result = await this.content.next();
    } catch (cause) {
      throw damaged(this.name, cause, this.entry);
    }
    if (!result.done) {
      this.checksum = crc32(result.value, this.checksum);
      return result.value;
    }
    if (this.checksum === this.entry.crc32) return null;
    throw damaged(this.name, new Error('its checksum does not match'), this.entry);
  }
}

function opened(path: string): Promise<ZipFile> {
  return new Promise((resolve, reject) => {
    open(path, { lazyEntries: true, autoClose: false }, (error, zip) => (error ? reject(error) : resolve(zip)));
  });
}

function listed(zip: ZipFile, name: string): Promise<Map<string, Entry>> {
  const entries = new Map<string, Entry>();
  return new Promise((resolve, reject) => {
    zip.on('error', reject);
    zip.on('end', () => resolve(entries));
    zip.on('entry', (entry: Entry) => {
      if (entries.has(entry.fileName)) reject(new InputError(name, `two entries named "${entry.fileName}"`, REMEDY));
      else if (entries.size >= MOST_ENTRIES) reject(new InputError(name, `more than ${MOST_ENTRIES} entries`, REMEDY));
      else {
        entries.set(entry.fileName, entry);
        zip.readEntry();
      }
    });
    zip.readEntry();
  });
}

function streamed(zip: ZipFile, entry: Entry): Promise<Readable> {
  return new Promise((resolve, reject) => {
    zip.openReadStream(entry, (error, stream) => (error ? reject(error) : resolve(stream)));
  });
}

function checkSizes(entries: ReadonlyMap<string, Entry>, bytes: number, name: string): void {
  let compressed = 0;
  for (const entry of entries.values()) {
    compressed += entry.compressedSize;
    if (entry.uncompressedSize > entry.compressedSize * MOST_GROWTH + FRAME) {
      const what = `"${entry.fileName}" claims ${entry.uncompressedSize} bytes out of ${entry.compressedSize}`;
      throw new InputError(name, what, 'make the file again');
    }
  }
  if (compressed > bytes) throw new InputError(name, 'its entries overlap each other', 'make the file again');
}

function damaged(name: string, cause: unknown, entry?: Entry): InputError {
  const where = entry ? `"${entry.fileName}" at byte ${entry.relativeOffsetOfLocalHeader}, ` : '';
  return new InputError(name, `damaged zip archive (${where}${(cause as Error).message})`, REMEDY, { cause });
}
