import type { Need } from './batch';
import { decode } from './dictionary';
import { integerSlab, type Slab } from './slab';

/** How one value of a column is laid out in a row of bytes. */
export interface PackedField {
  /** Bytes from the begin of the row. */
  offset: number;
  /** Bytes of one value. */
  size: number;
  /** `utf32` is NumPy's text, four bytes a character; `bytes` a text of one-byte units, ended by a NUL or full. */
  kind: 'signed' | 'unsigned' | 'float' | 'boolean' | 'bytes' | 'utf32';
  littleEndian: boolean;
}

const SIZES: Record<PackedField['kind'], readonly number[]> = {
  signed: [1, 2, 4, 8],
  unsigned: [1, 2, 4, 8],
  float: [2, 4, 8],
  boolean: [1],
  bytes: [],
  utf32: [],
};

/** True where `unpack` knows values of this kind and size. */
export function isReadable({ kind, size }: PackedField): boolean {
  return SIZES[kind].length === 0 ? size > 0 : SIZES[kind].includes(size);
}

/** What a field holds. */
export function typeOf({ kind }: PackedField): 'number' | 'text' {
  return kind === 'bytes' || kind === 'utf32' ? 'text' : 'number';
}

/** The values of one field in `rows` rows of `stride` bytes, as a need asks for them. */
export function unpack(bytes: Uint8Array, stride: number, rows: number, field: PackedField, as: Need['as']): Slab {
  const { kind, size } = field;
  if (kind === 'bytes' || kind === 'utf32') return { numbers: null, text: textAt(bytes, stride, field) };
  const view = new DataView(bytes.buffer, bytes.byteOffset, bytes.byteLength);
  if (kind !== 'float' && size === 8) return integerSlab(integers(view, stride, rows, field), as);
  const values = numbers(view, stride, rows, field);
  if (kind === 'boolean' && as === 'text') return { numbers: null, text: (row) => String(values[row] !== 0) };
  return { numbers: values, text: null };
}

function numbers(view: DataView, stride: number, rows: number, field: PackedField): Float64Array {
  const { offset, size, kind, littleEndian } = field;
  if (kind === 'float' && size === 8 && littleEndian && stride === 8 && view.byteOffset % 8 === 0) {
    return new Float64Array(view.buffer, view.byteOffset, rows);
  }
  const values = new Float64Array(rows);
  if (kind === 'float' && size === 8) {
    for (let i = 0, p = offset; i < rows; i++, p += stride) values[i] = view.getFloat64(p, littleEndian);
  } else if (kind === 'float' && size === 4) {
    for (let i = 0, p = offset; i < rows; i++, p += stride) values[i] = view.getFloat32(p, littleEndian);
  } else {
    const read = getter(view, field);
    for (let i = 0, p = offset; i < rows; i++, p += stride) values[i] = read(p);
  }
  return values;
}

function getter(view: DataView, { kind, size, littleEndian }: PackedField): (p: number) => number {
  if (kind === 'float') return (p) => half(view.getUint16(p, littleEndian));
  if (size === 1) return kind === 'signed' ? (p) => view.getInt8(p) : (p) => view.getUint8(p);
  if (size === 2)
    return kind === 'signed' ? (p) => view.getInt16(p, littleEndian) : (p) => view.getUint16(p, littleEndian);
  return kind === 'signed' ? (p) => view.getInt32(p, littleEndian) : (p) => view.getUint32(p, littleEndian);
}

/** A 16-bit float (IEEE 754 binary16) as a double. */
function half(bits: number): number {
  const sign = bits & 0x8000 ? -1 : 1;
  const exponent = (bits >> 10) & 31;
  const fraction = bits & 1023;
  if (exponent === 31) return fraction === 0 ? sign * Infinity : NaN;
  return exponent === 0 ? sign * fraction * 2 ** -24 : sign * (1024 + fraction) * 2 ** (exponent - 25);
}

function integers(view: DataView, stride: number, rows: number, field: PackedField): BigInt64Array | BigUint64Array {
  const { offset, kind, littleEndian } = field;
  const values = kind === 'signed' ? new BigInt64Array(rows) : new BigUint64Array(rows);
  for (let i = 0, p = offset; i < rows; i++, p += stride) {
    values[i] = kind === 'signed' ? view.getBigInt64(p, littleEndian) : view.getBigUint64(p, littleEndian);
  }
  return values;
}

function textAt(bytes: Uint8Array, stride: number, { offset, size, kind, littleEndian }: PackedField) {
  return (row: number): string => {
    const from = row * stride + offset;
    const field = bytes.subarray(from, from + size);
    if (kind === 'utf32') return utf32(field, littleEndian);
    const end = field.indexOf(0);
    return decode(end < 0 ? field : field.subarray(0, end));
  };
}

const LARGEST_CHARACTER = 0x10ffff;

function utf32(field: Uint8Array, littleEndian: boolean): string {
  const view = new DataView(field.buffer, field.byteOffset, field.length);
  let text = '';
  for (let p = 0; p + 4 <= field.length; p += 4) {
    const character = view.getUint32(p, littleEndian);
    if (character === 0) break;
    text += character > LARGEST_CHARACTER ? '\uFFFD' : String.fromCodePoint(character);
  }
  return text;
}
