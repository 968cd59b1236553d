import { exp, log } from './exp-log';
import type { RandomStream } from './random';

const LAYERS = 256;
/** Bits 0 to 7 of the first word choose the layer, bit 8 the sign, bits 11 to 31 and the second word the place. */
const LAYER_MASK = LAYERS - 1;
const SIGNED = 2;
const UNSIGNED = 0;

/** Where the tail begins, and the area of a layer, so that the 256th layer closes at the mode. */
export const NORMAL_TAIL = 3.6541528853610088;
export const NORMAL_AREA = 0.0049286732339746554;
export const EXPONENTIAL_TAIL = 7.69711747013105;
export const EXPONENTIAL_AREA = 0.003949659822581557;

interface Layers {
  /** Right end of layer `i`; layer 0 stands for itself and the tail, and is as wide as their area. `edge[256] = 0`. */
  edge: Float64Array;
  /** Unnormalised density at `edge`, from layer 1 on. */
  height: Float64Array;
  /** `edge * 2^-53`: the width of one of the 2^53 places of the layer. */
  step: Float64Array;
}

const normalDensity = (x: number): number => exp((-x * x) / 2);
const exponentialDensity = (x: number): number => exp(-x);

export const NORMAL = layersOf(NORMAL_TAIL, NORMAL_AREA, normalDensity, (y) => Math.sqrt(-2 * log(y)));
export const EXPONENTIAL = layersOf(EXPONENTIAL_TAIL, EXPONENTIAL_AREA, exponentialDensity, (y) => -log(y));

function layersOf(tail: number, area: number, density: (x: number) => number, inverse: (y: number) => number): Layers {
  const edge = new Float64Array(LAYERS + 1);
  edge[0] = area / density(tail);
  edge[1] = tail;
  for (let i = 2; i < LAYERS; i++) edge[i] = inverse(area / edge[i - 1]! + density(edge[i - 1]!));
  return { edge, height: edge.map(density), step: edge.map((x) => x * 2 ** -53) };
}

/**
 * The absolute value of a standard normal variate, never 0, by the ziggurat method. Layer, sign and the 53 bits of the place
 * in the layer are different bits of two words.
 * Sources: Marsaglia & Tsang, "The ziggurat method for generating random variables", J. Stat. Softw. 5 (2000) 8; Doornik,
 * "An improved ziggurat method to generate normal random samples" (2005), for the separation of the bits.
 */
export function halfNormal(stream: RandomStream): number {
  return halfNormalFrom(stream.word(), stream);
}

/** A standard normal variate. */
export function normal(stream: RandomStream): number {
  const first = stream.word();
  return halfNormalFrom(first, stream) * signOf(first, SIGNED);
}

/** A standard exponential variate, never 0. */
export function exponential(stream: RandomStream): number {
  const first = stream.word();
  const layer = first & LAYER_MASK;
  const x = placeOf(first, stream.word()) * EXPONENTIAL.step[layer]!;
  return x < EXPONENTIAL.edge[layer + 1]! ? x : exponentialRest(stream, layer, x);
}

function halfNormalFrom(first: number, stream: RandomStream): number {
  const layer = first & LAYER_MASK;
  const x = placeOf(first, stream.word()) * NORMAL.step[layer]!;
  return x < NORMAL.edge[layer + 1]! ? x : normalRest(stream, layer, x);
}

/** A place in a layer, in `(0, 2^53]`: half a step off the left end, so that no variate is 0. */
function placeOf(first: number, second: number): number {
  return second * 2 ** 21 + (first >>> 11) + 0.5;
}

function signOf(first: number, signs: number): number {
  return 1 - ((first >>> 7) & signs);
}

function normalRest(stream: RandomStream, layer: number, x: number): number {
  if (layer === 0) return normalTail(stream);
  return isUnder(stream, NORMAL, layer, normalDensity(x)) ? x : halfNormal(stream);
}

function exponentialRest(stream: RandomStream, layer: number, x: number): number {
  if (layer === 0) return EXPONENTIAL_TAIL + exponential(stream);
  return isUnder(stream, EXPONENTIAL, layer, exponentialDensity(x)) ? x : exponential(stream);
}

/** Whether a uniform height between the floor and the ceiling of a layer lies under the density. */
function isUnder(stream: RandomStream, { height }: Layers, layer: number, density: number): boolean {
  return height[layer]! + stream.uniform() * (height[layer + 1]! - height[layer]!) < density;
}

/** Marsaglia's tail (Technometrics 6 (1964) 101): exponential from the tail's beginning, thinned. */
function normalTail(stream: RandomStream): number {
  for (;;) {
    const beyond = exponential(stream) / NORMAL_TAIL;
    if (2 * exponential(stream) > beyond * beyond) return NORMAL_TAIL + beyond;
  }
}

/** Room for drawing up to `count` variates at once. */
export class Room {
  readonly words: Uint32Array;
  readonly rejected: Int32Array;

  constructor(count: number) {
    this.words = new Uint32Array(count);
    this.rejected = new Int32Array(count);
  }
}

/** Fills `out` with `halfNormal` variates: two words for each, then more for those rejected, in their order. */
export function fillHalfNormals(stream: RandomStream, out: Float64Array, room: Room): void {
  fillNormalsOf(stream, UNSIGNED, out, room);
}

/** Fills `out` with `normal` variates. */
export function fillNormals(stream: RandomStream, out: Float64Array, room: Room): void {
  fillNormalsOf(stream, SIGNED, out, room);
}

/** Those rejected keep the sign that their places have. */
function fillNormalsOf(stream: RandomStream, signs: number, out: Float64Array, { rejected }: Room): void {
  const rejects = fillPlaces(stream.state, NORMAL, signs, out, rejected);
  for (let r = 0; r < rejects; r++) {
    const i = rejected[r]! >>> 8;
    out[i] = Math.sign(out[i]!) * normalRest(stream, rejected[r]! & LAYER_MASK, Math.abs(out[i]!));
  }
}

/** Fills `out` with `exponential` variates. */
export function fillExponentials(stream: RandomStream, out: Float64Array, { rejected }: Room): void {
  const rejects = fillPlaces(stream.state, EXPONENTIAL, UNSIGNED, out, rejected);
  for (let r = 0; r < rejects; r++) {
    const i = rejected[r]! >>> 8;
    out[i] = exponentialRest(stream, rejected[r]! & LAYER_MASK, out[i]!);
  }
}

/**
 * Fills `out` with places in random layers. Those beyond the next layer's edge await a decision: they are listed as
 * `index * 256 + layer`, their number is returned. The loop that makes most of an ensemble: xoshiro128++ stands in it, two
 * steps a turn, so that its state stays in registers, and nothing is called (half as fast again as with words made beforehand).
 */
function fillPlaces(
  state: Int32Array,
  { step, edge }: Layers,
  signs: number,
  out: Float64Array,
  list: Int32Array,
): number {
  const count = out.length;
  let rejects = 0;
  let s0 = state[0]!;
  let s1 = state[1]!;
  let s2 = state[2]!;
  let s3 = state[3]!;
  for (let i = 0; i < count; i++) {
    let sum = (s0 + s3) | 0;
    const first = (((sum << 7) | (sum >>> 25)) + s0) | 0;
    let shifted = s1 << 9;
    s2 ^= s0;
    s3 ^= s1;
    s1 ^= s2;
    s0 ^= s3;
    s2 ^= shifted;
    s3 = (s3 << 11) | (s3 >>> 21);
    sum = (s0 + s3) | 0;
    const second = (((sum << 7) | (sum >>> 25)) + s0) >>> 0;
    shifted = s1 << 9;
    s2 ^= s0;
    s3 ^= s1;
    s1 ^= s2;
    s0 ^= s3;
    s2 ^= shifted;
    s3 = (s3 << 11) | (s3 >>> 21);
    const layer = first & LAYER_MASK;
    const x = placeOf(first, second) * step[layer]!;
    out[i] = x * signOf(first, signs);
    if (x >= edge[layer + 1]!) list[rejects++] = (i << 8) | layer;
  }
  state[0] = s0;
  state[1] = s1;
  state[2] = s2;
  state[3] = s3;
  return rejects;
}
