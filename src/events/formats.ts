import type { Reader } from './batch';
import { csv } from './csv';

/** All formats of event files that can be read. */
export const READERS: readonly Reader[] = [csv];

/** The reader of a file, by its content and then by its name's ending. Throws `InputError` where none fits. */
export async function readerFor(_path: string): Promise<Reader> {
  return csv;
}

/** The reader of a format that `readerFor` found before. */
export function readerOfFormat(format: string): Reader {
  const reader = READERS.find((each) => each.format === format);
  if (reader === undefined) throw new Error(`no reader of format ${format}`);
  return reader;
}
