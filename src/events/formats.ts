import type { Reader } from './batch';
import { firstBytes } from './byte-source';
import { csv } from './csv';
import { parquet } from './parquet';

/** All formats of event files that can be read. */
export const READERS: readonly Reader[] = [csv, parquet];

/** First bytes by which a format is known. */
const MAGIC: [Reader, string][] = [[parquet, 'PAR1']];

/** The reader of a file, by its content. What no other format claims is taken for a delimited table. */
export async function readerFor(path: string): Promise<Reader> {
  const first = Buffer.from(firstBytes(path, path, LONGEST_MAGIC)).toString('latin1');
  return MAGIC.find(([, magic]) => first.startsWith(magic))?.[0] ?? csv;
}

const LONGEST_MAGIC = 16;

/** The reader of a format that `readerFor` found before. */
export function readerOfFormat(format: string): Reader {
  const reader = READERS.find((each) => each.format === format);
  if (reader === undefined) throw new Error(`no reader of format ${format}`);
  return reader;
}
