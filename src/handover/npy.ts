import { closeSync, fstatSync, openSync, readSync, statSync } from 'node:fs';
import { open } from 'node:fs/promises';
import { InputError } from '../study/input-error';

/**
 * NPY 1.0 arrays, little-endian, C order: `numpy.load(..., mmap_mode="r")` opens them.
 * Source: NumPy Enhancement Proposal 1, "A Simple File Format for NumPy Arrays", and `numpy.lib.format`.
 * Numbers are written in the byte order of the machine, which is little-endian on every platform that Node 20 and the
 * parts of this program run on.
 */
export type NpyType = '<f8' | '<i8';

export interface NpyHeader {
  type: NpyType;
  shape: number[];
  /** Product of the shape; 1 for a scalar, `()`. */
  length: number;
  /** Byte at which the data start, a multiple of 64. */
  start: number;
}

export interface NpyArray extends NpyHeader {
  /** C order; integers of an int64 array as exact doubles. */
  values: Float64Array;
}

export const NPY_ITEM_BYTES = 8;
const MAGIC = Buffer.from('\x93NUMPY\x01\x00', 'latin1');
/** Magic, version, and the two bytes of the header's length. */
const PREAMBLE = MAGIC.length + 2;
/** Data start at a multiple of it, so that a mapped array is aligned for vector loads (NEP 1). */
const ALIGNMENT = 64;
/** Numbers converted or read at a time: 2 MiB, so that memory does not grow with the array. */
const BLOCK = 2 ** 18;

/** Everything in front of the data, padded so that they start at a multiple of 64 bytes. */
export function npyHeader(type: NpyType, shape: readonly number[]): Buffer {
  const tuple = shape.length === 1 ? `${shape[0]},` : shape.join(', ');
  const text = `{'descr': '${type}', 'fortran_order': False, 'shape': (${tuple}), }`;
  const start = Math.ceil((PREAMBLE + text.length + 1) / ALIGNMENT) * ALIGNMENT;
  const header = Buffer.alloc(start, ' ');
  MAGIC.copy(header);
  header.writeUInt16LE(start - PREAMBLE, MAGIC.length);
  header.write(text, PREAMBLE, 'latin1');
  header.write('\n', start - 1);
  return header;
}

/**
 * The bytes of `values` as items of `type`. Doubles are not copied: the bytes are a view of the array.
 * Throws `RangeError` where an int64 item is no integer that a double holds exactly.
 */
export function npyBytes(type: NpyType, values: Float64Array): Buffer {
  if (type === '<f8') return Buffer.from(values.buffer, values.byteOffset, values.byteLength);
  const integers = new BigInt64Array(values.length);
  for (let i = 0; i < values.length; i++) {
    if (!Number.isSafeInteger(values[i])) throw new RangeError(`${values[i]} is not an exact integer`);
    integers[i] = BigInt(values[i]!);
  }
  return Buffer.from(integers.buffer);
}

/** Writes one array. `data` has the product of `shape` numbers (else `RangeError`), integers where `type` is `<i8`. */
export async function writeNpy(
  path: string,
  type: NpyType,
  shape: readonly number[],
  data: Float64Array,
): Promise<void> {
  const length = shape.reduce((product, n) => product * n, 1);
  if (data.length !== length)
    throw new RangeError(`${data.length} numbers do not fill the shape (${shape.join(', ')})`);
  const file = await open(path, 'w');
  try {
    await file.writeFile(npyHeader(type, shape));
    for (let at = 0; at < length; at += BLOCK) {
      await file.writeFile(npyBytes(type, data.subarray(at, Math.min(at + BLOCK, length))));
    }
  } finally {
    await file.close();
  }
}

/**
 * Reads and checks the header of an open NPY file, and the file's length against it. `where` names the file in errors.
 * Throws `InputError` for anything but NPY 1.0, `<f8` or `<i8`, C order, exactly as long as its shape says.
 */
export function readNpyHeader(fd: number, where: string): NpyHeader {
  const preamble = readFully(fd, 0, PREAMBLE, where);
  if (!preamble.subarray(0, MAGIC.length).equals(MAGIC)) throw faulty(where, 'not an NPY 1.0 file');
  const start = PREAMBLE + preamble.readUInt16LE(MAGIC.length);
  const text = readFully(fd, PREAMBLE, start - PREAMBLE, where).toString('latin1');
  const { type, shape } = parseDictionary(text, where);
  const length = shape.reduce((product, n) => product * n, 1);
  const wanted = start + length * NPY_ITEM_BYTES;
  const found = fstatSync(fd).size;
  if (wanted !== found) {
    throw faulty(where, `${found} bytes where the shape (${shape.join(', ')}) asks for ${wanted}`);
  }
  return { type, shape, length, start };
}

/** Items `[from, to)` of an array whose header has been read. */
export function readNpyPart(fd: number, header: NpyHeader, from: number, to: number, where: string): Float64Array {
  const values = new Float64Array(to - from);
  for (let at = from; at < to; at += BLOCK) {
    const part = values.subarray(at - from, Math.min(at + BLOCK, to) - from);
    const bytes = new Uint8Array(part.buffer, part.byteOffset, part.byteLength);
    fill(fd, bytes, header.start + at * NPY_ITEM_BYTES, where);
    if (header.type === '<i8') integersInPlace(part, at, where);
  }
  return values;
}

/** Reads one array whole. Throws `InputError` as `readNpyHeader`, and where an integer exceeds 2^53. */
export function readNpy(path: string, where = path): NpyArray {
  const fd = openForReading(path, where);
  try {
    const header = readNpyHeader(fd, where);
    return { ...header, values: readNpyPart(fd, header, 0, header.length, where) };
  } finally {
    closeSync(fd);
  }
}

/** Opens a regular file to read; a missing one, or what would block (a pipe), is an `InputError` that names it. */
export function openForReading(path: string, where: string): number {
  try {
    if (!statSync(path).isFile()) throw new InputError(where, 'not a file', 'name a bundle that is whole');
    return openSync(path, 'r');
  } catch (cause) {
    if (cause instanceof InputError) throw cause;
    throw new InputError(where, `cannot be opened (${(cause as NodeJS.ErrnoException).code})`, 'build it again', {
      cause,
    });
  }
}

function integersInPlace(part: Float64Array, first: number, where: string): void {
  const integers = new BigInt64Array(part.buffer, part.byteOffset, part.length);
  for (let i = 0; i < part.length; i++) {
    const value = Number(integers[i]);
    if (!Number.isSafeInteger(value)) throw faulty(where, `item ${first + i} is an integer beyond 2^53`);
    part[i] = value;
  }
}

const DICTIONARY = /^\{'descr': '([^']*)', 'fortran_order': (True|False), 'shape': \(([\d, ]*)\), \} *\n$/;

function parseDictionary(text: string, where: string): { type: NpyType; shape: number[] } {
  const match = DICTIONARY.exec(text);
  if (!match) throw faulty(where, 'the NPY header cannot be read');
  const [, type, fortran, tuple] = match as unknown as [string, string, string, string];
  if (type !== '<f8' && type !== '<i8') throw faulty(where, `items of type "${type}" where <f8 or <i8 is wanted`);
  if (fortran === 'True') throw faulty(where, 'Fortran order where C order is wanted');
  const shape = tuple.split(',').flatMap((n) => (n.trim() === '' ? [] : [Number(n)]));
  const bytes = shape.reduce((product, n) => product * n, NPY_ITEM_BYTES);
  if (!shape.every(Number.isSafeInteger) || !Number.isSafeInteger(bytes)) {
    throw faulty(where, `absurd shape (${tuple})`);
  }
  return { type, shape };
}

function readFully(fd: number, position: number, length: number, where: string): Buffer {
  const bytes = Buffer.alloc(length);
  fill(fd, bytes, position, where);
  return bytes;
}

function fill(fd: number, bytes: Uint8Array, position: number, where: string): void {
  for (let done = 0; done < bytes.length;) {
    const read = readSync(fd, bytes, done, bytes.length - done, position + done);
    if (read === 0) throw faulty(where, `ends after ${position + done} bytes`);
    done += read;
  }
}

function faulty(where: string, what: string): InputError {
  return new InputError(where, what, 'the file is damaged or not of this program: build or copy it again');
}
