import { closeSync } from 'node:fs';
import type { Message } from 'apache-arrow';
import { InputError } from '../study/input-error';
import { firstBytes, openFile, readAt, sizeOf } from './byte-source';

type Arrow = typeof import('apache-arrow');

/** What may be taken into memory at once: a larger record batch is refused. */
export const LARGEST_BODY = 268_435_456;
/** The description of a message: names, types and places, never data. */
const LARGEST_HEAD = 16_777_216;
const FILE_MAGIC = 'ARROW1';
/** The magic of a file is padded to eight bytes. */
const FILE_START = 8;
const CONTINUATION = 0xffffffff;
const REMEDY = 'copy or make the file again';

/** One message of Arrow's IPC format: a schema, a dictionary, or a record batch. */
export interface ArrowMessage {
  message: Message;
  /** Bytes of the whole message in the file, head and body. */
  start: number;
  end: number;
}

/**
 * The messages of an Arrow IPC stream or file (a file is a stream with a magic before and a table of contents behind),
 * heads alone. Walked here for what the library does not tell: the place of a damage, the size of a batch before memory
 * is taken for it, and whether the stream was ever ended. Throws `InputError` at each of these.
 */
export function* messagesOf(arrow: Arrow, path: string, name: string): Generator<ArrowMessage> {
  const size = sizeOf(path, name);
  const isFile = isArrowFile(path, name);
  const file = openFile(path, name);
  const bytesAt = (start: number, length: number): Buffer => {
    const bytes = Buffer.alloc(length);
    if (readAt(file, bytes, length, start, name) < length) throw truncated(name, size);
    return bytes;
  };
  try {
    if (isFile && bytesAt(Math.max(0, size - FILE_MAGIC.length), FILE_MAGIC.length).toString('latin1') !== FILE_MAGIC) {
      throw truncated(name, size);
    }
    for (let start = isFile ? FILE_START : 0; ;) {
      if (start === size)
        throw new InputError(name, 'its stream was never ended: rows may be missing', 'write it again and close it');
      const marked = bytesAt(start, 4).readUInt32LE() === CONTINUATION;
      // Before version 0.15 of the format the length came first.
      const prefix = marked ? 8 : 4;
      const length = bytesAt(start + prefix - 4, 4).readInt32LE();
      if (length === 0) return;
      if (length < 0 || length > LARGEST_HEAD) throw damaged(name, start, `a head of ${length} bytes`);
      const message = decode(arrow, bytesAt(start + prefix, length), name, start);
      const end = start + prefix + length + message.bodyLength;
      if (message.bodyLength < 0 || end > size) throw truncated(name, size);
      if (message.bodyLength > LARGEST_BODY) {
        const what = `a record batch of ${message.bodyLength} bytes at byte ${start}, at most ${LARGEST_BODY} are read`;
        throw new InputError(name, what, 'write it in smaller batches');
      }
      yield { message, start, end };
      start = end;
    }
  } finally {
    closeSync(file);
  }
}

/** True for the file form, which has a table of contents; a stream has none. */
export function isArrowFile(path: string, name: string): boolean {
  return Buffer.from(firstBytes(path, name, FILE_MAGIC.length)).toString('latin1') === FILE_MAGIC;
}

function decode(arrow: Arrow, head: Uint8Array, name: string, start: number): Message {
  try {
    return arrow.Message.decode(head);
  } catch (cause) {
    throw damaged(name, start, (cause as Error).message, cause);
  }
}

function truncated(name: string, size: number): InputError {
  return new InputError(name, `truncated: the Arrow data break off at byte ${size}`, REMEDY);
}

export function damaged(name: string, place: number, why: string, cause?: unknown): InputError {
  return new InputError(name, `damaged or no Arrow data at byte ${place} (${why})`, REMEDY, { cause });
}
