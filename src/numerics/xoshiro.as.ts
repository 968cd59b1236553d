/** `xoshiro.ts` in AssemblyScript, bit for bit. The state stands in memory, at `STATE`. */

/** Address of the state: four 32-bit words. */
export const STATE: usize = 16;

/** The next output. */
export function nextWord(): u32 {
  const s0 = load<u32>(STATE);
  const s1 = load<u32>(STATE, 4);
  const s2 = load<u32>(STATE, 8) ^ s0;
  const s3 = load<u32>(STATE, 12) ^ s1;
  store<u32>(STATE, s0 ^ s3);
  store<u32>(STATE, s1 ^ s2, 4);
  store<u32>(STATE, s2 ^ (s1 << 9), 8);
  store<u32>(STATE, rotl<u32>(s3, 11), 12);
  return rotl<u32>(s0 + (s3 ^ s1), 7) + s0;
}

/** Puts the next `count` outputs at `words`. */
export function fillWords(words: usize, count: i32): void {
  for (let i = 0; i < count; i++) store<u32>(words + ((<usize>i) << 2), nextWord());
}

/** Uniform in the open interval (0, 1), as `RandomStream.uniform`. */
export function uniform(): f64 {
  while (true) {
    const first = nextWord();
    const bits = placeBits(first, nextWord());
    if (bits != 0) return <f64>bits * (1.0 / 9007199254740992.0);
  }
}

/** 53 bits: all of the second word and the upper 21 of the first. */
export function placeBits(first: u32, second: u32): i64 {
  return <i64>(((<u64>second) << 21) | ((<u64>first) >> 11));
}
