import { exp } from './exp-log.as';
import { nextWord, placeBits, STATE, uniform } from './xoshiro.as';

/** `ziggurat.ts` in AssemblyScript, bit for bit: see there for what is computed and why. */

const LAYER_MASK: u32 = 255;
const SIGNED: u32 = 2;
const UNSIGNED: u32 = 0;
const NORMAL_TAIL: f64 = 3.6541528853610088;
const EXPONENTIAL_TAIL: f64 = 7.69711747013105;

/** A table of layers is 257 edges, then as many steps, then as many heights. */
const STEPS: usize = 8 * 257;
const HEIGHTS: usize = 2 * STEPS;
/** Address of the two tables; `quick-columns.ts` fills them. */
export const TABLES: usize = 32;
const NORMAL: usize = TABLES;
const EXPONENTIAL: usize = NORMAL + 3 * STEPS;
/** The first byte behind what stands at a fixed address. */
export const FREE: usize = EXPONENTIAL + 3 * STEPS;

function halfNormal(): f64 {
  return halfNormalFrom(nextWord());
}

export function normal(): f64 {
  const first = nextWord();
  return halfNormalFrom(first) * signOf(first, SIGNED);
}

function exponential(): f64 {
  const first = nextWord();
  const layer = first & LAYER_MASK;
  const x = placeOf(first, nextWord()) * entry(EXPONENTIAL + STEPS, layer);
  return x < entry(EXPONENTIAL, layer + 1) ? x : exponentialRest(layer, x);
}

function halfNormalFrom(first: u32): f64 {
  const layer = first & LAYER_MASK;
  const x = placeOf(first, nextWord()) * entry(NORMAL + STEPS, layer);
  return x < entry(NORMAL, layer + 1) ? x : normalRest(layer, x);
}

function entry(table: usize, layer: u32): f64 {
  return load<f64>(table + ((<usize>layer) << 3));
}

function placeOf(first: u32, second: u32): f64 {
  return <f64>placeBits(first, second) + 0.5;
}

function signOf(first: u32, signs: u32): f64 {
  return <f64>(1 - <i32>((first >> 7) & signs));
}

function normalRest(layer: u32, x: f64): f64 {
  if (layer == 0) return normalTail();
  return isUnder(NORMAL, layer, exp((-x * x) / 2)) ? x : halfNormal();
}

function exponentialRest(layer: u32, x: f64): f64 {
  if (layer == 0) return EXPONENTIAL_TAIL + exponential();
  return isUnder(EXPONENTIAL, layer, exp(-x)) ? x : exponential();
}

function isUnder(table: usize, layer: u32, density: f64): bool {
  const floor = entry(table + HEIGHTS, layer);
  return floor + uniform() * (entry(table + HEIGHTS, layer + 1) - floor) < density;
}

function normalTail(): f64 {
  while (true) {
    const beyond = exponential() / NORMAL_TAIL;
    if (2 * exponential() > beyond * beyond) return NORMAL_TAIL + beyond;
  }
}

/** Fills `out` with `count` half normals; `list` has room for as many words and one more. */
export function fillHalfNormals(out: usize, count: i32, list: usize): void {
  fillNormalsOf(UNSIGNED, out, count, list);
}

/** Fills `out` with normals. */
export function fillNormals(out: usize, count: i32, list: usize): void {
  fillNormalsOf(SIGNED, out, count, list);
}

/** Those rejected keep the sign that their places have. */
function fillNormalsOf(signs: u32, out: usize, count: i32, list: usize): void {
  const end = fillPlaces(NORMAL, signs, out, count, list);
  for (let r = list; r < end; r += 4) {
    const at = placeAt(out, r);
    const x = load<f64>(at);
    store<f64>(at, copysign(normalRest(load<u32>(r) & LAYER_MASK, abs(x)), x));
  }
}

/** Fills `out` with exponentials. */
export function fillExponentials(out: usize, count: i32, list: usize): void {
  const end = fillPlaces(EXPONENTIAL, UNSIGNED, out, count, list);
  for (let r = list; r < end; r += 4) {
    const at = placeAt(out, r);
    store<f64>(at, exponentialRest(load<u32>(r) & LAYER_MASK, load<f64>(at)));
  }
}

function placeAt(out: usize, rejected: usize): usize {
  return out + ((<usize>(load<u32>(rejected) >> 8)) << 3);
}

/** Fills `out` with places in random layers and lists those that await a decision; the end of the list. */
function fillPlaces(table: usize, signs: u32, out: usize, count: i32, list: usize): usize {
  let s0 = load<u32>(STATE);
  let s1 = load<u32>(STATE, 4);
  let s2 = load<u32>(STATE, 8);
  let s3 = load<u32>(STATE, 12);
  let end = list;
  for (let i: u32 = 0; i < <u32>count; i++) {
    const first = rotl<u32>(s0 + s3, 7) + s0;
    let shifted = s1 << 9;
    s2 ^= s0;
    s3 ^= s1;
    s1 ^= s2;
    s0 ^= s3;
    s2 ^= shifted;
    s3 = rotl<u32>(s3, 11);
    const second = rotl<u32>(s0 + s3, 7) + s0;
    shifted = s1 << 9;
    s2 ^= s0;
    s3 ^= s1;
    s1 ^= s2;
    s0 ^= s3;
    s2 ^= shifted;
    s3 = rotl<u32>(s3, 11);
    const layer = first & LAYER_MASK;
    const x = placeOf(first, second) * entry(table + STEPS, layer);
    store<f64>(out + ((<usize>i) << 3), x * signOf(first, signs));
    // Written in any case, counted where it is rejected: no branch to foretell.
    store<u32>(end, (i << 8) | layer);
    end += (<usize>(x >= entry(table, layer + 1))) << 2;
  }
  store<u32>(STATE, s0);
  store<u32>(STATE, s1, 4);
  store<u32>(STATE, s2, 8);
  store<u32>(STATE, s3, 12);
  return end;
}
