import { rotated, wordAt } from './word';

const C1 = 0x239b961b;
const C2 = 0xab0e9789;
const C3 = 0x38b34ae5;
const C4 = 0xa1e38b93;

/**
 * MurmurHash3_x86_128 of `bytes[from, to)` (Austin Appleby, 2011, public domain), built of 32-bit operations alone. The
 * four words go to `out`. Quick and well mixed, but no protection against keys made to collide.
 */
export function murmur128(bytes: Uint8Array, from: number, to: number, seed: number, out: Uint32Array): void {
  let h1 = seed;
  let h2 = seed;
  let h3 = seed;
  let h4 = seed;
  let p = from;
  for (; p + 16 <= to; p += 16) {
    h1 ^= mix(wordAt(bytes, p), C1, 15, C2);
    h1 = (Math.imul((rotated(h1, 19) + h2) | 0, 5) + 0x561ccd1b) | 0;
    h2 ^= mix(wordAt(bytes, p + 4), C2, 16, C3);
    h2 = (Math.imul((rotated(h2, 17) + h3) | 0, 5) + 0x0bcaa747) | 0;
    h3 ^= mix(wordAt(bytes, p + 8), C3, 17, C4);
    h3 = (Math.imul((rotated(h3, 15) + h4) | 0, 5) + 0x96cd1c35) | 0;
    h4 ^= mix(wordAt(bytes, p + 12), C4, 18, C1);
    h4 = (Math.imul((rotated(h4, 13) + h1) | 0, 5) + 0x32ac3b17) | 0;
  }
  if (p + 12 < to) h4 ^= mix(tail(bytes, p + 12, to), C4, 18, C1);
  if (p + 8 < to) h3 ^= mix(tail(bytes, p + 8, to), C3, 17, C4);
  if (p + 4 < to) h2 ^= mix(tail(bytes, p + 4, to), C2, 16, C3);
  if (p < to) h1 ^= mix(tail(bytes, p, to), C1, 15, C2);
  const length = to - from;
  finish(h1 ^ length, h2 ^ length, h3 ^ length, h4 ^ length, out);
}

function finish(h1: number, h2: number, h3: number, h4: number, out: Uint32Array): void {
  let first = (h1 + h2 + h3 + h4) | 0;
  let second = avalanche((h2 + first) | 0);
  let third = avalanche((h3 + first) | 0);
  let fourth = avalanche((h4 + first) | 0);
  first = avalanche(first);
  first = (first + second + third + fourth) | 0;
  second += first;
  third += first;
  fourth += first;
  out[0] = first;
  out[1] = second;
  out[2] = third;
  out[3] = fourth;
}

function mix(k: number, multiplier: number, turn: number, multiplier2: number): number {
  return Math.imul(rotated(Math.imul(k, multiplier), turn), multiplier2);
}

/** Up to four last bytes as a word, absent ones zero. */
function tail(bytes: Uint8Array, p: number, to: number): number {
  let k = 0;
  for (let i = 0; i < 4 && p + i < to; i++) k |= bytes[p + i] << (8 * i);
  return k;
}

function avalanche(h: number): number {
  h = Math.imul(h ^ (h >>> 16), 0x85ebca6b);
  h = Math.imul(h ^ (h >>> 13), 0xc2b2ae35);
  return h ^ (h >>> 16);
}
