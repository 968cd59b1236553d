import fc from 'fast-check';
import { deserialize, serialize } from 'node:v8';
import { describe, expect, it } from 'vitest';
import { decode, encode } from '../../main/page/codec';

const round = (value: unknown): unknown => decode(encode(value));

describe('values cross the bridge as bytes', () => {
  it('brings back texts, numbers, lists and objects as they were', () => {
    const value = { title: 'Tagged photons', list: [1, 'two', null, true, { deep: [[]] }], none: null, empty: {} };
    expect(round(value)).toStrictEqual(value);
  });

  it('brings back every kind of typed array to the bit, NaN and minus zero included', () => {
    const value = {
      doubles: Float64Array.of(0.1, NaN, -0, Infinity, 5e-324),
      floats: Float32Array.of(1.5, NaN),
      ints: Int32Array.of(-1, 2 ** 31 - 1),
      words: Uint32Array.of(2 ** 32 - 1),
      shorts: Uint16Array.of(65535),
      bytes: Uint8Array.of(0, 255, 7),
      longs: BigInt64Array.of(-(2n ** 63n)),
      nothing: new Float64Array(0),
    };
    expect(round(value)).toStrictEqual(value);
  });

  it('carries a million doubles in no more than eight bytes each and a short header', () => {
    const message = encode({ values: new Float64Array(1e6) });
    expect(message.byteLength).toBeLessThan(8e6 + 100);
  });

  it('reads arrays as views of the message, so that nothing is copied', () => {
    const message = encode({ values: Float64Array.of(1, 2) });
    const { values } = decode(message) as { values: Float64Array };
    expect(values.buffer).toBe(message.buffer);
  });

  it('takes a message that stands anywhere in its buffer', () => {
    const message = encode({ values: Float64Array.of(1, 2, 3) });
    const shifted = new Uint8Array(message.length + 3);
    shifted.set(message, 3);
    expect(decode(shifted.subarray(3))).toStrictEqual({ values: Float64Array.of(1, 2, 3) });
    expect(decode(Buffer.from(shifted.buffer, 3))).toStrictEqual({ values: Float64Array.of(1, 2, 3) });
  });

  it('keeps a view of part of a buffer to that part', () => {
    expect(round(new Float64Array([1, 2, 3, 4]).subarray(1, 3))).toStrictEqual(Float64Array.of(2, 3));
  });

  it('keeps NaN and the infinities outside arrays, which JSON would turn into null', () => {
    expect(round([NaN, Infinity, -Infinity])).toStrictEqual([NaN, Infinity, -Infinity]);
  });

  it('leaves out undefined members as JSON does', () => {
    expect(round({ a: undefined, b: 1 })).toStrictEqual({ b: 1 });
  });

  it('keeps keys that look like its own placeholders, or like a prototype', () => {
    const value = JSON.parse('{"$": ["Float64Array", 0, 1], "__proto__": {"x": 1}, "b": {"$": 2}}') as unknown;
    const back = round(value);
    expect(back).toStrictEqual(value);
    expect(Object.getPrototypeOf(back)).toBe(Object.prototype);
  });

  it('agrees with structured cloning on any JSON value', () => {
    fc.assert(
      fc.property(fc.jsonValue({ noNegativeZero: true } as never), (value) => {
        const plain = JSON.parse(JSON.stringify(value)) as unknown;
        expect(round(plain)).toStrictEqual(deserialize(serialize(plain)));
      }),
    );
  });

  it('refuses what is not plain data', () => {
    for (const value of [() => 1, new Map(), new Date(0), 1n, Symbol('x'), new DataView(new ArrayBuffer(8))]) {
      expect(() => encode({ value })).toThrow(TypeError);
    }
  });
});

describe('damaged messages', () => {
  const header = (json: string, rest = 0): Uint8Array => {
    const text = new TextEncoder().encode(json);
    const out = new Uint8Array(Math.ceil((4 + text.length) / 8) * 8 + rest);
    new DataView(out.buffer).setUint32(0, text.length, true);
    out.set(text, 4);
    return out;
  };

  it('are refused, whatever is wrong with them', () => {
    const bad = [
      new Uint8Array(0),
      new Uint8Array([1, 0]),
      new Uint8Array([255, 255, 255, 255, 1]),
      header('{"a": '),
      header('{"$": 3}'),
      header('{"$": ["Map", 0, 0]}'),
      header('{"$": ["constructor", 0, 0]}'),
      header('{"$": ["Float64Array", 0, 2]}', 8),
      header('{"$": ["Float64Array", -8, 1]}', 8),
      header('{"$": ["Float64Array", 4, 1]}', 16),
      header('{"$": ["Float64Array", 0, 1e300]}', 16),
      header('{"$": ["Float64Array", "0", 1]}', 16),
    ];
    for (const message of bad) expect(() => decode(message)).toThrow();
  });

  it('take an array that ends exactly at the end of the message', () => {
    expect(decode(header('{"$": ["Float64Array", 0, 1]}', 8))).toStrictEqual(Float64Array.of(0));
  });
});
