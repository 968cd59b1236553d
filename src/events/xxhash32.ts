import { rotated, wordAt } from './word';

const STRIPE = 16;
const P1 = 0x9e3779b1;
const P2 = 0x85ebca77;
const P3 = 0xc2b2ae3d;
const P4 = 0x27d4eb2f;
const P5 = 0x165667b1;

/**
 * XXH32 with seed 0 of `bytes[from, to)` (Yann Collet's published specification, "xxHash fast digest algorithm", version
 * 0.1.1), the checksum of LZ4 frames; an unsigned 32-bit integer.
 */
export function xxHash32(bytes: Uint8Array, from: number, to: number): number {
  let p = from;
  let hash = P5;
  if (to - from >= STRIPE) {
    const lanes = Int32Array.of(P1 + P2, P2, 0, -P1);
    for (; p + STRIPE <= to; p += STRIPE) {
      for (let lane = 0; lane < 4; lane++) {
        lanes[lane] = Math.imul(rotated(lanes[lane] + Math.imul(wordAt(bytes, p + 4 * lane), P2), 13), P1);
      }
    }
    hash = rotated(lanes[0], 1) + rotated(lanes[1], 7) + rotated(lanes[2], 12) + rotated(lanes[3], 18);
  }
  hash = (hash + to - from) | 0;
  for (; p + 4 <= to; p += 4) hash = Math.imul(rotated(hash + Math.imul(wordAt(bytes, p), P3), 17), P4);
  for (; p < to; p++) hash = Math.imul(rotated(hash + Math.imul(bytes[p], P5), 11), P1);
  hash = Math.imul(hash ^ (hash >>> 15), P2);
  hash = Math.imul(hash ^ (hash >>> 13), P3);
  return (hash ^ (hash >>> 16)) >>> 0;
}
