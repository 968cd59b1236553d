/**
 * Fills `words` with the next outputs of xoshiro128++ 1.0 and leaves `state` (four 32-bit words, not all zero) behind
 * the last of them. Period 2^128 - 1.
 * Source: Blackman & Vigna, "Scrambled linear pseudorandom number generators", ACM TOMS 47 (2021) 36.
 */
export function fillWords(state: Int32Array, words: Int32Array): void {
  // Local 32-bit integers stay in registers: this loop makes every random number of an ensemble.
  let [s0, s1, s2, s3] = state as unknown as [number, number, number, number];
  for (let i = 0; i < words.length; i++) {
    const sum = (s0 + s3) | 0;
    words[i] = (((sum << 7) | (sum >>> 25)) + s0) | 0;
    const shifted = s1 << 9;
    s2 ^= s0;
    s3 ^= s1;
    s1 ^= s2;
    s0 ^= s3;
    s2 ^= shifted;
    s3 = (s3 << 11) | (s3 >>> 21);
  }
  state.set([s0, s1, s2, s3]);
}
