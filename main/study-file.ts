import { readFileSync, statSync } from 'node:fs';
import { InputError } from '../src/study/input-error';
import { parseStudyText, type Study } from '../src/study/study';

/** A study document is a few kilobytes; a file beyond this is something else. */
const MOST_BYTES = 16 << 20;

/** Reads and checks a study document. Throws `InputError` where it is not there or not one. */
export function readStudyFile(path: string): Study {
  let text: string;
  try {
    if (statSync(path).size > MOST_BYTES)
      throw new InputError(path, 'too large for a study document', 'name a *.study.json');
    text = readFileSync(path, 'utf8');
  } catch (cause) {
    if (cause instanceof InputError) throw cause;
    const { code, message } = cause as NodeJS.ErrnoException;
    throw new InputError(
      path,
      code === 'ENOENT' ? 'no such file' : `cannot be read (${code ?? message})`,
      'name a study document',
      { cause },
    );
  }
  return parseStudyText(text, path);
}
