import { createHash, randomUUID } from 'node:crypto';
import { createReadStream } from 'node:fs';
import { rename, rm, stat, writeFile } from 'node:fs/promises';
import { basename, dirname, join } from 'node:path';
import { InputError, stopIfCancelled } from '../study/input-error';

/** A file that was handed over: whole, in its place, and what it weighs. */
export interface WrittenFile {
  path: string;
  bytes: number;
  sha256: string;
}

/**
 * Lets `write` fill temporary files beside their places, and moves them there once all are whole: a failed or cancelled
 * write leaves what stood there before, or nothing. The temporary names keep the endings of the places.
 */
export async function writeWhole(
  places: readonly string[],
  write: (temporaries: string[]) => Promise<void>,
  signal?: AbortSignal,
): Promise<WrittenFile[]> {
  stopIfCancelled(signal);
  const temporaries = places.map(temporaryName);
  try {
    // The place is tried before anything is computed, and by the same words for every format.
    for (const path of temporaries) await writeFile(path, '', { flag: 'wx' });
    await write(temporaries);
    const files: WrittenFile[] = [];
    for (const [i, path] of places.entries()) files.push({ path, ...(await weigh(temporaries[i]!, signal)) });
    for (const [i, path] of places.entries()) await rename(temporaries[i]!, path);
    return files;
  } catch (error) {
    await Promise.all(temporaries.map((path) => rm(path, { force: true })));
    stopIfCancelled(signal);
    throw placeFault(error, places[0]!);
  }
}

/** Length and SHA-256 of a file, read in a stream. */
export async function weigh(path: string, signal?: AbortSignal): Promise<{ bytes: number; sha256: string }> {
  const hash = createHash('sha256');
  for await (const chunk of createReadStream(path, { highWaterMark: READ_AHEAD })) {
    stopIfCancelled(signal);
    hash.update(chunk as Buffer);
  }
  return { bytes: (await stat(path)).size, sha256: hash.digest('hex') };
}

/** Bytes hashed at a time. */
const READ_AHEAD = 2 ** 20;

function temporaryName(place: string): string {
  return join(dirname(place), `.${randomUUID().slice(0, 8)}-${basename(place)}`);
}

/** Faults of the place itself are the user's to mend; anything else passes. */
function placeFault(error: unknown, place: string): unknown {
  if (error instanceof InputError) return error;
  const { code, message } = error as NodeJS.ErrnoException;
  const fault = PLACE_FAULTS.find(([name, text]) => name === code || (text && message?.includes(text)));
  return fault ? new InputError(place, fault[2], 'name another place', { cause: error }) : error;
}

/** Code, the words by which a library that has no code tells it, and ours. */
const PLACE_FAULTS: [code: string, words: string, ours: string][] = [
  ['ENOSPC', 'No space left on device', 'the disk is full'],
  ['ENOENT', '', 'the folder does not exist'],
  ['EACCES', '', 'writing there is not allowed'],
  ['EPERM', '', 'writing there is not allowed'],
  ['EROFS', '', 'the disk is read-only'],
  ['EISDIR', '', 'a folder stands there'],
  ['ENOTDIR', '', 'a part of the path is no folder'],
];
