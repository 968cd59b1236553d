import { gammaVariate } from './gamma-variate';
import { poissonVariate } from './poisson-variate';
import { threefry4x32 } from './threefry';
import { fillWords, startingState } from './xoshiro';
import { exponential, halfNormal, normal } from './ziggurat';

/** What a stream is drawn for: the uses of one seed are independent of each other. A number is never given twice. */
export const PURPOSE = {
  ensemble: 1,
  runDrift: 2,
  rehearsal: 3,
  planner: 4,
  demonstration: 5,
  test: 6,
  slopeBias: 7,
  compare: 8,
} as const;
export type Purpose = (typeof PURPOSE)[keyof typeof PURPOSE];

/** A stream of random numbers, started from four 32-bit words. Every variate takes its words off it in order. */
export class RandomStream {
  readonly state: Int32Array;
  readonly #next = new Uint32Array(2);

  constructor(start: Int32Array) {
    this.state = startingState(start);
  }

  /** 32 random bits, as an integer from 0 to 2^32 - 1. */
  word(): number {
    fillWords(this.state, this.#next, 1);
    return this.#next[0]!;
  }

  /** Puts the next `count` words at the beginning of `words`. */
  fill(words: Uint32Array, count: number): void {
    fillWords(this.state, words, count);
  }

  /** Uniform in the open interval (0, 1): a multiple of 2^-53. */
  uniform(): number {
    fillWords(this.state, this.#next, 2);
    const bits = this.#next[1]! * 2 ** 21 + (this.#next[0]! >>> 11);
    return bits === 0 ? this.uniform() : bits * 2 ** -53;
  }

  /** Standard normal. */
  normal(): number {
    return normal(this);
  }

  /** Absolute value of a standard normal, never 0. */
  halfNormal(): number {
    return halfNormal(this);
  }

  /** Exponential of mean 1, never 0. */
  exponential(): number {
    return exponential(this);
  }

  /** Gamma of the given shape and scale 1; see `gammaVariate`. */
  gamma(shape: number): number {
    return gammaVariate(this, shape);
  }

  /** Poisson of the given mean; see `poissonVariate`. */
  poisson(mean: number): number {
    return poissonVariate(this, mean);
  }
}

/**
 * The stream that belongs to a seed, a purpose and a place `(a, b)` (column and block, chain and step, ...) and to
 * nothing else: no other stream need be drawn before it. `seed`, `a` and `b` are integers from 0 to 2^53 - 1, else
 * `RangeError`. Its start is Threefry4x32-20 of the counter `(a, b)` under the key `(seed, purpose)`: a bijection, so
 * different places of one seed and purpose start differently.
 */
export function streamOf(seed: number, purpose: Purpose, a: number, b: number): RandomStream {
  for (const value of [seed, a, b]) {
    if (!Number.isSafeInteger(value) || value < 0) throw new RangeError(`not an integer from 0 to 2^53 - 1: ${value}`);
  }
  return new RandomStream(threefry4x32([...halves(seed), purpose, 0], [...halves(a), ...halves(b)]));
}

/** The low and the high 32 bits. */
function halves(value: number): [number, number] {
  return [value >>> 0, Math.floor(value / 2 ** 32)];
}
