const WORDS = 4;
/** Parity word of the key schedule, the low half of Threefish's C240. */
const PARITY = 0x1bd11bda;
/** Rotations of rounds `d mod 8`: of the words 0 and 1 (round even), 0 and 3 (odd); and of the other pair. */
const ROTATION_A = [10, 11, 13, 23, 6, 17, 25, 18] as const;
const ROTATION_B = [26, 21, 27, 5, 20, 11, 10, 20] as const;
const ROUNDS_A_KEY = 4;

/**
 * Threefry4x32: a bijection of the 128-bit counter for every 128-bit key, made to pass every battery of tests as a
 * counter-based generator from 13 rounds on; 20 is its authors' recommendation. Keys and counters are four 32-bit words.
 * Source: Salmon, Moraes, Dror & Shaw, "Parallel random numbers: as easy as 1, 2, 3", SC'11 (2011).
 */
export function threefry4x32(key: ArrayLike<number>, counter: ArrayLike<number>, rounds = 20): Int32Array {
  const schedule = [key[0]! | 0, key[1]! | 0, key[2]! | 0, key[3]! | 0, PARITY ^ key[0]! ^ key[1]! ^ key[2]! ^ key[3]!];
  const x = Int32Array.from({ length: WORDS }, (_, i) => counter[i]! | 0);
  addKey(x, schedule, 0);
  for (let round = 0; round < rounds; round++) {
    const partner = round % 2 === 0 ? 1 : 3;
    mix(x, 0, partner, ROTATION_A[round % 8]!);
    mix(x, 2, 4 - partner, ROTATION_B[round % 8]!);
    if ((round + 1) % ROUNDS_A_KEY === 0) addKey(x, schedule, (round + 1) / ROUNDS_A_KEY);
  }
  return x;
}

function mix(x: Int32Array, i: number, j: number, rotation: number): void {
  x[i]! += x[j]!;
  x[j] = ((x[j]! << rotation) | (x[j]! >>> (32 - rotation))) ^ x[i]!;
}

function addKey(x: Int32Array, schedule: readonly number[], injection: number): void {
  for (let i = 0; i < WORDS; i++) x[i]! += schedule[(injection + i) % schedule.length]!;
  x[WORDS - 1]! += injection;
}
