/**
 * Fills the first `count` of `words` with the next outputs of xoshiro128++ 1.0; `state` (four 32-bit words, not all
 * zero) moves on behind them. Period 2^128 - 1.
 * Source: Blackman & Vigna, "Scrambled linear pseudorandom number generators", ACM TOMS 47 (2021) 36.
 */
export function fillWords(state: Int32Array, words: Uint32Array, count: number): void {
  // Local integers stay in registers: every random number of an ensemble comes out of this loop.
  let s0 = state[0]!;
  let s1 = state[1]!;
  let s2 = state[2]!;
  let s3 = state[3]!;
  for (let i = 0; i < count; i++) {
    const sum = (s0 + s3) | 0;
    words[i] = ((sum << 7) | (sum >>> 25)) + s0;
    const shifted = s1 << 9;
    s2 ^= s0;
    s3 ^= s1;
    s1 ^= s2;
    s0 ^= s3;
    s2 ^= shifted;
    s3 = (s3 << 11) | (s3 >>> 21);
  }
  state[0] = s0;
  state[1] = s1;
  state[2] = s2;
  state[3] = s3;
}

/** A state that xoshiro can start from: all zero, the one state it would never leave, becomes a fixed other one. */
export function startingState(words: Int32Array): Int32Array {
  return words.some((word) => word !== 0) ? words.slice() : Int32Array.of(1, 0, 0, 0);
}
