import { arrow } from './arrow';
import type { Reader } from './batch';
import { firstBytes } from './byte-source';
import { csv } from './csv';
import { hdf5 } from './hdf5';
import { ndjson } from './ndjson';
import { npy } from './npy';
import { npz } from './npz';
import { compressionOf, openBytes } from './open-bytes';
import { parquet } from './parquet';

/** All formats of event files that can be read. */
export const READERS: readonly Reader[] = [csv, ndjson, parquet, hdf5, arrow, npy, npz];

/** First bytes by which a binary format is known, as Latin-1. */
const MAGIC: [string, Reader][] = [
  ['PAR1', parquet],
  ['\x89HDF\r\n\x1a\n', hdf5],
  ['ARROW1', arrow],
  ['FEA1', arrow],
  ['\x93NUMPY', npy],
  // The two ways a zip archive begins: with an entry, or with its end where it has none.
  ['PK\x03\x04', npz],
  ['PK\x05\x06', npz],
  // The continuation mark of a stream.
  ['\xff\xff\xff\xff', arrow],
];
const LONGEST_MAGIC = 16;

/** Names that tell a format: of text, compressed or not, or of a binary file whose first bytes do not. */
const ENDINGS: [RegExp, Reader][] = [
  [/\.(ndjson|jsonl|json)(\.gz|\.zst|\.zstd)?$/i, ndjson],
  [/\.(h5|hdf5|hdf|he5)$/i, hdf5],
  [/\.(parquet|pq)$/i, parquet],
  [/\.npy$/i, npy],
  [/\.npz$/i, npz],
  [/\.(arrow|arrows|feather|ipc)$/i, arrow],
  [/\.(csv|tsv)(\.gz|\.zst|\.zstd)?$/i, csv],
];

/**
 * The reader of a file: a binary format by its content, a text by its name's ending, else by its first sign. Throws
 * `InputError` where the file cannot be read.
 */
export async function readerFor(path: string): Promise<Reader> {
  const first = Buffer.from(firstBytes(path, path, LONGEST_MAGIC)).toString('latin1');
  const binary = MAGIC.find(([magic]) => first.startsWith(magic));
  if (binary) return binary[1];
  const named = ENDINGS.find(([ending]) => ending.test(path));
  if (named) return named[1];
  return (await firstSign(path)) === '{' ? ndjson : csv;
}

/** The reader of a format that `readerFor` found before. */
export function readerOfFormat(format: string): Reader {
  const reader = READERS.find((each) => each.format === format);
  if (reader === undefined) throw new Error(`no reader of format ${format}`);
  return reader;
}

/** Enough to get past blank lines at the top of a text. */
const TOP = 4096;

/** The first character of a text, decompressed, that is no blank; empty where there is none. */
async function firstSign(path: string): Promise<string> {
  const source = openBytes(path, path, compressionOf(path, path));
  try {
    const bytes = Buffer.alloc(TOP);
    const got = await source.fill(bytes);
    return bytes.toString('utf8', 0, got).trimStart().charAt(0);
  } finally {
    source.close();
  }
}
