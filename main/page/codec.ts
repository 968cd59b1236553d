/**
 * Values with typed arrays as bytes: `u32 header length | JSON header, padded | arrays, each 8-aligned`, little-endian.
 * In the header an array stands as `{ "$": ["Float64Array", offset, length] }`, offset counted from the first array.
 * Numbers that JSON does not know stand as `{ "$": ["NaN"] }`. Plain objects, lists, texts, numbers, booleans, `null`
 * and typed arrays cross; `undefined` members are left out as in JSON; anything else is a `TypeError`.
 * Pure: the page and the main side use the same file. Both run on little-endian machines alone.
 */
const ARRAYS = { Float64Array, Float32Array, Int32Array, Uint32Array, Uint16Array, Uint8Array, BigInt64Array };
type ArrayName = keyof typeof ARRAYS;

/** Every typed array starts at a multiple of this, so that it is read as a view and not copied. */
const ALIGNMENT = 8;
const LENGTH_BYTES = 4;
const SPECIAL = new Map<number, string>([
  [NaN, 'NaN'],
  [Infinity, 'Infinity'],
  [-Infinity, '-Infinity'],
]);

export function encode(value: unknown): Uint8Array<ArrayBuffer> {
  const arrays: { array: ArrayBufferView; offset: number }[] = [];
  let bytes = 0;
  const keep = (array: ArrayBufferView) => {
    const offset = bytes;
    arrays.push({ array, offset });
    bytes += padded(array.byteLength);
    return offset;
  };
  const header = new TextEncoder().encode(JSON.stringify(packed(value, keep)) ?? 'null');
  const start = padded(LENGTH_BYTES + header.length);
  const out = new Uint8Array(start + bytes);
  new DataView(out.buffer).setUint32(0, header.length, true);
  out.set(header, LENGTH_BYTES);
  for (const { array, offset } of arrays) {
    out.set(new Uint8Array(array.buffer, array.byteOffset, array.byteLength), start + offset);
  }
  return out;
}

/** Arrays of the result are views of `message`'s memory. Throws `TypeError` for bytes that `encode` did not make. */
export function decode(message: Uint8Array): unknown {
  // A view must start at a multiple of its element size in its buffer: what does not is copied once.
  const whole = message.byteOffset % ALIGNMENT === 0 ? message : new Uint8Array(message);
  if (whole.byteLength < LENGTH_BYTES) throw new TypeError('message without a header');
  const length = new DataView(whole.buffer, whole.byteOffset).getUint32(0, true);
  if (LENGTH_BYTES + length > whole.byteLength) throw new TypeError('message shorter than its header says');
  const text = new TextDecoder('utf-8', { fatal: true }).decode(whole.subarray(LENGTH_BYTES, LENGTH_BYTES + length));
  return unpacked(JSON.parse(text), whole, padded(LENGTH_BYTES + length));
}

function padded(bytes: number): number {
  return Math.ceil(bytes / ALIGNMENT) * ALIGNMENT;
}

function packed(value: unknown, keep: (array: ArrayBufferView) => number): unknown {
  if (typeof value === 'number') return SPECIAL.has(value) ? { $: [SPECIAL.get(value)] } : value;
  if (value === null || typeof value === 'string' || typeof value === 'boolean' || value === undefined) return value;
  if (Array.isArray(value)) return value.map((entry) => packed(entry, keep));
  if (ArrayBuffer.isView(value)) return { $: packedArray(value, keep) };
  if (typeof value !== 'object' || !isPlain(value)) throw new TypeError(`${String(value)} cannot cross the bridge`);
  const entries = Object.entries(value).map(([key, entry]) => [key, packed(entry, keep)] as const);
  // A plain object with the key of the placeholders goes as a list of its members.
  return '$' in value ? { $: ['object', entries] } : Object.fromEntries(entries);
}

function packedArray(view: ArrayBufferView, keep: (array: ArrayBufferView) => number): unknown[] {
  for (const [name, Kind] of Object.entries(ARRAYS)) {
    if (view instanceof Kind) return [name, keep(view), view.length];
  }
  throw new TypeError(`${view.constructor.name} cannot cross the bridge`);
}

function isPlain(value: object): boolean {
  const prototype: unknown = Object.getPrototypeOf(value);
  // The prototype of another realm's plain object is one whose own prototype is null.
  return prototype === null || Object.getPrototypeOf(prototype) === null;
}

function unpacked(value: unknown, whole: Uint8Array, start: number): unknown {
  if (typeof value !== 'object' || value === null) return value;
  if (Array.isArray(value)) return value.map((entry) => unpacked(entry, whole, start));
  if ('$' in value) return placeholder(value.$, whole, start);
  return Object.fromEntries(Object.entries(value).map(([key, entry]) => [key, unpacked(entry, whole, start)]));
}

function placeholder(tag: unknown, whole: Uint8Array, start: number): unknown {
  if (!Array.isArray(tag)) throw new TypeError('unknown placeholder');
  const [name, first, length] = tag as unknown[];
  for (const [number, text] of SPECIAL) if (name === text) return number;
  if (name === 'object' && Array.isArray(first)) {
    const entries = (first as [string, unknown][]).map(([key, entry]) => [key, unpacked(entry, whole, start)] as const);
    return Object.fromEntries(entries);
  }
  if (typeof name !== 'string' || !Object.hasOwn(ARRAYS, name)) throw new TypeError('unknown placeholder');
  const Kind = ARRAYS[name as ArrayName];
  if (!isCount(first) || !isCount(length)) throw new TypeError('array without a place');
  const from = start + first;
  if (first % ALIGNMENT !== 0 || from + length * Kind.BYTES_PER_ELEMENT > whole.byteLength) {
    throw new TypeError('array outside its message');
  }
  return new Kind(whole.buffer as ArrayBuffer, whole.byteOffset + from, length);
}

function isCount(value: unknown): value is number {
  return typeof value === 'number' && Number.isSafeInteger(value) && value >= 0;
}
