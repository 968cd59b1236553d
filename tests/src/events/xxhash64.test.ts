import { describe, expect, test } from 'vitest';
import { XxHash64 } from '../../../src/events/xxhash64';

function digest(...parts: Uint8Array[]): bigint {
  const hash = new XxHash64();
  for (const part of parts) hash.update(part);
  const { high, low } = hash.digest();
  return (BigInt(high) << 32n) | BigInt(low);
}

const MASK = (1n << 64n) - 1n;
const [P1, P2, P3, P4, P5] = [
  0x9e3779b185ebca87n,
  0xc2b2ae3d27d4eb4fn,
  0x165667b19e3779f9n,
  0x85ebca77c2b2ae63n,
  0x27d4eb2f165667c5n,
];
const rotate = (x: bigint, by: bigint): bigint => ((x << by) | (x >> (64n - by))) & MASK;
const round = (x: bigint, lane: bigint): bigint => (rotate((x + lane * P2) & MASK, 31n) * P1) & MASK;

/** The published specification (doc/xxhash_spec.md, version 0.1.1) step by step, in big integers. */
function specified(bytes: Uint8Array): bigint {
  const view = new DataView(bytes.buffer, bytes.byteOffset, bytes.length);
  let p = 0;
  let h = P5;
  if (bytes.length >= 32) {
    const lanes = [(P1 + P2) & MASK, P2, 0n, (0n - P1) & MASK];
    for (; p + 32 <= bytes.length; p += 32)
      lanes.forEach((x, i) => (lanes[i] = round(x, view.getBigUint64(p + 8 * i, true))));
    h = lanes.reduce((sum, x, i) => sum + rotate(x, [1n, 7n, 12n, 18n][i]), 0n) & MASK;
    for (const lane of lanes) h = ((h ^ round(0n, lane)) * P1 + P4) & MASK;
  }
  h = (h + BigInt(bytes.length)) & MASK;
  for (; p + 8 <= bytes.length; p += 8) h = (rotate(h ^ round(0n, view.getBigUint64(p, true)), 27n) * P1 + P4) & MASK;
  if (p + 4 <= bytes.length) {
    h = (rotate(h ^ ((BigInt(view.getUint32(p, true)) * P1) & MASK), 23n) * P2 + P3) & MASK;
    p += 4;
  }
  for (; p < bytes.length; p++) h = (rotate(h ^ ((BigInt(bytes[p]) * P5) & MASK), 11n) * P1) & MASK;
  h = ((h ^ (h >> 33n)) * P2) & MASK;
  h = ((h ^ (h >> 29n)) * P3) & MASK;
  return h ^ (h >> 32n);
}

describe('XXH64', () => {
  test('gives the widely published digests (memory; the frames of the zstd program confirm them)', () => {
    expect(digest()).toBe(0xef46db3751d8e999n);
    expect(digest(Buffer.from('abc'))).toBe(0x44bc2cf5ad770999n);
  });

  test('is what its specification says at every length around its stripes, however the bytes arrive', () => {
    const bytes = Uint8Array.from({ length: 200 }, (_, i) => (i * 167 + 13) % 256);
    for (let length = 0; length <= bytes.length; length++) {
      const part = bytes.subarray(0, length);
      const expected = specified(part);
      expect(digest(part), `${length} bytes`).toBe(expected);
      for (const cut of [1, 7, 31, 32, 33]) expect(digest(part.subarray(0, cut), part.subarray(cut))).toBe(expected);
    }
  });
});
