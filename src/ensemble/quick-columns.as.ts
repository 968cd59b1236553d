import { exp } from '../numerics/exp-log.as';
import { fillVariatesAbove } from '../numerics/gamma-variate.as';
import { STATE } from '../numerics/xoshiro.as';
import { fillExponentials, fillHalfNormals, FREE, TABLES } from '../numerics/ziggurat.as';

/**
 * AssemblyScript: built to WebAssembly (see DEVELOPERS.md). Draws columns bit for bit as `draw.ts` does; the modules it
 * imports repeat those of their name. `quick-columns.ts` lays out the memory.
 */

/** Where the stream's state stands, the tables of layers, and the first byte that is free. */
export const state: i32 = <i32>STATE;
export const tables: i32 = <i32>TABLES;
export const free: i32 = <i32>FREE;

let outcomes: i32 = 0;
/** The outcome of each cell; */
let cellsOf: usize = 0;
let variates: usize = 0;
let exponentials: usize = 0;
let offset: usize = 0;
let slope: usize = 0;
let reciprocal: usize = 0;
let scale: usize = 0;
let words: usize = 0;
let list: usize = 0;

/** Outcomes of all columns, and the addresses of arrays that have room for as many; `list` for one more. */
export function begin(
  outcomeCount: i32,
  cellsAt: i32,
  variatesAt: i32,
  exponentialsAt: i32,
  offsetAt: i32,
  slopeAt: i32,
  reciprocalAt: i32,
  scaleAt: i32,
  wordsAt: i32,
  listAt: i32,
): void {
  outcomes = outcomeCount;
  cellsOf = cellsAt;
  variates = variatesAt;
  exponentials = exponentialsAt;
  offset = offsetAt;
  slope = slopeAt;
  reciprocal = reciprocalAt;
  scale = scaleAt;
  words = wordsAt;
  list = listAt;
}

/**
 * Draws `replicas` rows of a column into `into`. Its cells are those of shape 1/2, then those of shape 1, then the `others`, the last
 * `below` of which are below 1; outcomes that are no cell are 0.
 */
export function draw(halves: i32, ones: i32, others: i32, below: i32, scaled: bool, replicas: i32, into: i32): void {
  const cells = halves + ones + others;
  const onesAt = variates + ((<usize>halves) << 3);
  const othersAt = onesAt + ((<usize>ones) << 3);
  const belowAt = othersAt + ((<usize>(others - below)) << 3);
  let row: usize = into;
  for (let replica = 0; replica < replicas; replica++) {
    fillHalfNormals(variates, halves, list);
    halveSquares(halves);
    fillExponentials(onesAt, ones, list);
    fillVariatesAbove(offset, slope, othersAt, others, words, list);
    if (below > 0) boost(belowAt, below);
    if (scaled) multiply(cells);
    const unit = 1 / sum(cells);
    if (cells < outcomes) memory.fill(row, 0, (<usize>outcomes) << 3);
    for (let i: usize = 0; i < <usize>cells; i++) {
      store<f64>(row + ((<usize>load<u32>(cellsOf + (i << 2))) << 3), load<f64>(variates + (i << 3)) * unit);
    }
    row += (<usize>outcomes) << 3;
  }
}

function halveSquares(count: i32): void {
  for (let at = variates; at < variates + ((<usize>count) << 3); at += 8) {
    const value = load<f64>(at);
    store<f64>(at, 0.5 * value * value);
  }
}

function boost(below: usize, count: i32): void {
  fillExponentials(exponentials, count, list);
  for (let at: usize = 0; at < (<usize>count) << 3; at += 8) {
    const factor = exp(-load<f64>(exponentials + at) * load<f64>(reciprocal + at));
    store<f64>(below + at, load<f64>(below + at) * factor);
  }
}

function multiply(count: i32): void {
  for (let at: usize = 0; at < (<usize>count) << 3; at += 8) {
    store<f64>(variates + at, load<f64>(variates + at) * load<f64>(scale + at));
  }
}

/** In two strands, because an addition waits for the one before it. */
function sum(count: i32): f64 {
  let even: f64 = 0;
  let odd: f64 = 0;
  const pairs = variates + ((<usize>(count & ~1)) << 3);
  for (let at = variates; at < pairs; at += 16) {
    even += load<f64>(at);
    odd += load<f64>(at, 8);
  }
  return even + odd + ((count & 1) == 1 ? load<f64>(pairs) : 0);
}
