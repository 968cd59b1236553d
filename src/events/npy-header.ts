import { InputError } from '../study/input-error';
import type { NamedColumn } from './named-columns';
import { isReadable, type PackedField } from './packed-field';
import { parsePythonLiteral, type PythonLiteral } from './python-literal';

const MAGIC = '\x93NUMPY';
/** Magic and version. */
const VERSION_END = 8;
/** A header describes columns: a longer one is made to take memory. */
const LONGEST_HEADER = 1_048_576;
/** So much of a file holds its longest header. */
export const MOST_HEADER_BYTES = LONGEST_HEADER + 12;

/** A column of a NumPy array of one dimension: its items, or a field of them where it is structured. */
export interface NpyColumn extends NamedColumn {
  field: PackedField | null;
}

/** What the header of an NPY array tells (NEP 1, `numpy.lib.format`, versions 1.0 to 3.0). */
export interface NpyHeader {
  /** The byte where the data begin. */
  start: number;
  rows: number;
  /** Bytes of one item. */
  stride: number;
  columns: NpyColumn[];
}

/** Where the data begin, out of the first 12 bytes or more. Throws `InputError` for what is no NPY array. */
export function dataStart(bytes: Uint8Array, file: string): number {
  if (Buffer.from(bytes.subarray(0, MAGIC.length)).toString('latin1') !== MAGIC || bytes.length < 12) {
    throw fault(file, bytes.length < 12 ? 'it breaks off in its header' : 'it does not begin as one');
  }
  const view = new DataView(bytes.buffer, bytes.byteOffset, bytes.length);
  const [major] = bytes.subarray(6);
  if (major < 1 || major > 3) throw fault(file, `version ${major}`);
  const length = major === 1 ? view.getUint16(VERSION_END, true) : view.getUint32(VERSION_END, true);
  if (length > LONGEST_HEADER) throw fault(file, `a header of ${length} bytes`);
  return VERSION_END + (major === 1 ? 2 : 4) + length;
}

/**
 * Reads the header out of the first bytes of an array, `dataStart` of them at least. `name` is the array's own in an
 * archive: its columns are `name`, or `name:field`; a lone array's are `field`. Throws `InputError` for a damaged header.
 */
export function parseNpyHeader(bytes: Uint8Array, name: string, file: string): NpyHeader {
  const start = dataStart(bytes, file);
  if (bytes.length < start) throw fault(file, 'it breaks off in its header');
  const text = Buffer.from(bytes.subarray(bytes[6] === 1 ? 10 : 12, start)).toString(
    bytes[6] === 3 ? 'utf8' : 'latin1',
  );
  let header: PythonLiteral;
  try {
    header = parsePythonLiteral(text);
  } catch (cause) {
    throw fault(file, `its header: ${(cause as Error).message}`, cause);
  }
  if (typeof header !== 'object' || header === null || Array.isArray(header))
    throw fault(file, 'its header is no dictionary');
  const shape = header.shape;
  const whole = (n: PythonLiteral): n is number => typeof n === 'number' && Number.isSafeInteger(n) && n >= 0;
  if (!Array.isArray(shape) || !shape.every(whole)) throw fault(file, 'its header tells no shape');
  const rows = shape.length === 1 ? shape[0] : 0;
  const items = itemsOf(header.descr, file);
  const columns = items.fields.map((item): NpyColumn => {
    const fullName = item.name === null ? name : name === '' ? item.name : `${name}:${item.name}`;
    if (shape.length !== 1)
      return { name: fullName, rows, field: null, fault: `an array of ${shape.length} dimensions` };
    return { name: fullName, rows, field: item.fault === '' ? item.field : null, fault: item.fault };
  });
  return { start, rows, stride: items.stride, columns };
}

interface Item {
  name: string | null;
  field: PackedField;
  fault: string;
}

function itemsOf(descr: PythonLiteral | undefined, file: string): { fields: Item[]; stride: number } {
  if (typeof descr === 'string') {
    const item = itemOf(null, descr, 0, file);
    return { fields: [item], stride: item.field.size };
  }
  if (!Array.isArray(descr)) throw fault(file, 'its header tells no type');
  const fields: Item[] = [];
  let stride = 0;
  for (const entry of descr) {
    const [title, type, dimensions] = Array.isArray(entry) ? entry : [null, null];
    const name = Array.isArray(title) ? title[1] : title;
    if (typeof name !== 'string') throw fault(file, 'its header names a field by no text');
    const item = nestedOr(name, type, dimensions, stride, file);
    stride += item.field.size;
    // Padding between fields has no name.
    if (name !== '') fields.push(item);
  }
  return { fields, stride };
}

/** A field, which may itself be structured or an array: its size is known then, but it is no column. */
function nestedOr(
  name: string,
  type: PythonLiteral,
  dimensions: PythonLiteral | undefined,
  offset: number,
  file: string,
): Item {
  const item = Array.isArray(type)
    ? { ...itemOf(name, '|V1', offset, file), fault: 'records of its own' }
    : itemOf(name, type, offset, file);
  if (Array.isArray(type)) item.field.size = itemsOf(type, file).stride;
  if (dimensions === undefined) return item;
  const sizes = Array.isArray(dimensions) ? dimensions : [dimensions];
  if (!sizes.every((n) => typeof n === 'number' && Number.isSafeInteger(n) && n >= 0))
    throw fault(file, 'a field of no shape');
  item.field.size *= (sizes as number[]).reduce((product, n) => product * n, 1);
  return { ...item, fault: 'arrays' };
}

const KINDS: Record<string, PackedField['kind']> = {
  i: 'signed',
  u: 'unsigned',
  f: 'float',
  b: 'boolean',
  S: 'bytes',
  a: 'bytes',
  U: 'utf32',
};
const OTHERS: Record<string, string> = {
  c: 'complex numbers',
  m: 'time spans',
  M: 'times',
  O: 'Python objects',
  V: 'raw bytes',
};
const UTF32_BYTES = 4;

function itemOf(name: string | null, type: PythonLiteral, offset: number, file: string): Item {
  const parts = typeof type === 'string' ? /^([<>|=])?([a-zA-Z])(\d*)(\[.*\])?$/.exec(type) : null;
  const kind = parts?.[2] ?? '';
  if (parts === null || !(kind in KINDS || kind in OTHERS)) throw fault(file, `a type ${JSON.stringify(type)}`);
  // Python's pickles are programs: an array of objects has nothing but a pickle behind its header.
  if (kind === 'O')
    throw new InputError(
      file,
      'holds Python objects, which only running a program could read',
      'save it with a numeric type',
    );
  const count = Number(parts[3] || (kind === 'b' ? 1 : 0));
  const size = kind === 'U' ? count * UTF32_BYTES : count;
  const field: PackedField = { offset, size, kind: KINDS[kind] ?? 'bytes', littleEndian: parts[1] !== '>' };
  const readable = kind in KINDS && isReadable(field);
  return { name, field, fault: readable ? '' : (OTHERS[kind] ?? `numbers of ${size} bytes`) };
}

function fault(file: string, why: string, cause?: unknown): InputError {
  return new InputError(file, `damaged or no NPY array (${why})`, 'save it again, with numpy.save or numpy.savez', {
    cause,
  });
}
