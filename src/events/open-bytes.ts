import { PlainBytes, type ByteSource } from './byte-source';
import { GzipBytes, isGzip } from './gzip';
import { isZstd, ZstdBytes } from './zstd';

export type Compression = 'none' | 'gzip' | 'zstd';

/** How a file is compressed, by its first bytes. */
export function compressionOf(path: string, name: string): Compression {
  if (isGzip(path, name)) return 'gzip';
  return isZstd(path, name) ? 'zstd' : 'none';
}

/** The bytes of a text file, decompressed; a file that is not compressed may be read in part, from `start` to `end`. */
export function openBytes(path: string, name: string, how: Compression, start = 0, end = Infinity): ByteSource {
  if (how === 'gzip') return new GzipBytes(path, name);
  return how === 'zstd' ? new ZstdBytes(new PlainBytes(path, name), name) : new PlainBytes(path, name, start, end);
}
