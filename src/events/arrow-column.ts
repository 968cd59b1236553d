import type { Data, DataType, Vector } from 'apache-arrow';
import type { Need } from './batch';
import { integerSlab, type Slab } from './slab';

type Arrow = typeof import('apache-arrow');

/** What a column of this type holds; `unknown` for what is neither a single number nor a text. */
export function kindOf(arrow: Arrow, type: DataType): 'number' | 'text' | 'unknown' {
  const { DataType: is } = arrow;
  if (is.isInt(type) || is.isFloat(type) || is.isBool(type) || is.isDecimal(type) || is.isNull(type)) return 'number';
  if (is.isUtf8(type) || is.isLargeUtf8(type)) return 'text';
  return is.isDictionary(type) ? kindOf(arrow, type.dictionary) : 'unknown';
}

/** The values of a column in one record batch. Where `null`, its bytes are arbitrary: it becomes `NaN` or empty. */
export function slabOf(arrow: Arrow, vector: Vector, as: Need['as']): Slab {
  const { DataType: is } = arrow;
  const { type } = vector as { type: DataType };
  const plain = vector.data.length === 1 ? (vector.data[0] as Data) : null;
  if (plain && (is.isInt(type) || (is.isFloat(type) && type.precision !== arrow.Precision.HALF))) {
    const values = plain.values as Float64Array | BigInt64Array;
    const length = plain.length;
    if (values instanceof BigInt64Array || (values as unknown) instanceof BigUint64Array) {
      return integersWithNulls(vector, integerSlab((values as BigInt64Array).subarray(0, length), as));
    }
    return { numbers: withNulls(vector, (values as Float64Array).subarray(0, length)), text: null };
  }
  if (kindOf(arrow, type) === 'text') return { numbers: null, text: (row) => (vector.get(row) as string | null) ?? '' };
  if (is.isDecimal(type))
    return { numbers: null, text: (row) => decimal(vector.get(row) as Uint32Array | null, type.scale) };
  if (is.isBool(type) && as === 'text') return { numbers: null, text: (row) => String(vector.get(row) ?? '') };
  return { numbers: Float64Array.from({ length: vector.length }, (_, row) => numberAt(vector, row)), text: null };
}

/** Whether every buffer of a column holds as much as its rows need: a damaged one may hold less, and nothing else tells. */
export function isWhole(arrow: Arrow, vector: Vector): boolean {
  return vector.data.every((data) => {
    const { length, type, values, valueOffsets, nullBitmap, nullCount, stride } = data as Data;
    const { DataType: is } = arrow;
    if (nullCount > 0 && !is.isNull(type) && nullBitmap.length * 8 < length) return false;
    if (is.isDictionary(type) && !isWhole(arrow, data.dictionary as Vector)) return false;
    if (is.isNull(type) || length === 0) return true;
    if (valueOffsets) return valueOffsets.length > length && Number(valueOffsets[length]) <= values.length;
    return is.isBool(type) ? values.length * 8 >= length : values.length >= length * stride;
  });
}

function numberAt(vector: Vector, row: number): number {
  const value = vector.get(row) as number | bigint | boolean | null;
  return value === null ? NaN : Number(value);
}

function withNulls(vector: Vector, values: ArrayLike<number>): ArrayLike<number> {
  if (vector.nullCount === 0) return values;
  const numbers = Float64Array.from(values);
  for (let row = 0; row < numbers.length; row++) if (!vector.isValid(row)) numbers[row] = NaN;
  return numbers;
}

function integersWithNulls(vector: Vector, { numbers, text }: Slab): Slab {
  if (vector.nullCount === 0) return { numbers, text };
  return { numbers: withNulls(vector, numbers!), text: text && ((row) => (vector.isValid(row) ? text(row) : '')) };
}

/** A decimal of little-endian 32-bit words in two's complement, with `scale` digits behind the point, as text. */
function decimal(words: Uint32Array | null, scale: number): string {
  if (words === null) return '';
  const bits = words.length * 32;
  const unsigned = words.reduceRight((sum, word) => (sum << 32n) | BigInt(word), 0n);
  const value = BigInt.asIntN(bits, unsigned);
  const digits = String(value < 0n ? -value : value).padStart(Math.max(scale, 0) + 1, '0');
  const sign = value < 0n ? '-' : '';
  if (scale <= 0) return `${sign}${digits}${'0'.repeat(-scale)}`;
  return `${sign}${digits.slice(0, -scale)}.${digits.slice(-scale)}`;
}
