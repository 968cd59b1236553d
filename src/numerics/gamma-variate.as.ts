import { log } from './exp-log.as';
import { fillWords, nextWord } from './xoshiro.as';
import { fillNormals, normal } from './ziggurat.as';

/** `gamma-variate.ts` in AssemblyScript, bit for bit: see there for what is computed and why. */

const SQUARE_LIMIT: f64 = 0.25;
const SERIES_UP_TO: f64 = 0.25;
/** 2^-32. */
const TO_UNIT: f64 = 1.0 / 4294967296.0;

/** `fillVariatesAbove`; `words` has room for `count` of them, `list` for one more. */
export function fillVariatesAbove(
  offset: usize,
  slope: usize,
  out: usize,
  count: i32,
  words: usize,
  list: usize,
): void {
  fillNormals(out, count, list);
  fillWords(words, count);
  const end = keepInside(words, offset, slope, out, count, list);
  for (let r = list; r < end; r += 4) {
    const i = <usize>load<u32>(r);
    const at = out + (i << 3);
    const d = load<f64>(offset + (i << 3));
    const c = load<f64>(slope + (i << 3));
    const t = c * load<f64>(at);
    store<f64>(at, isAccepted(load<u32>(words + (i << 2)), d, t) ? d * cube(1 + t) : variateAbove(d, c));
  }
}

/** Makes variates of the normals that pass the quick test, and lists the others; the end of the list. */
function keepInside(words: usize, offset: usize, slope: usize, out: usize, count: i32, list: usize): usize {
  let end = list;
  for (let i: usize = 0; i < <usize>count; i++) {
    const at = out + (i << 3);
    const d = load<f64>(offset + (i << 3));
    const t = load<f64>(slope + (i << 3)) * load<f64>(at);
    if (isInside(load<u32>(words + (i << 2)), d, t)) store<f64>(at, d * cube(1 + t));
    else {
      store<u32>(end, <u32>i);
      end += 4;
    }
  }
  return end;
}

function variateAbove(offset: f64, slope: f64): f64 {
  while (true) {
    const t = slope * normal();
    const u = nextWord();
    if (isInside(u, offset, t) || isAccepted(u, offset, t)) return offset * cube(1 + t);
  }
}

function cube(x: f64): f64 {
  return x * x * x;
}

function isInside(u: u32, offset: f64, t: f64): bool {
  const square = t * t;
  return square <= SQUARE_LIMIT && (<f64>u + 1) * TO_UNIT < 1 - 1.5 * offset * square * square;
}

function isAccepted(u: u32, offset: f64, t: f64): bool {
  if (t <= -1) return false;
  const uniform = (<f64>u + (<f64>nextWord() + 0.5) * TO_UNIT) * TO_UNIT;
  return log(uniform) < 3 * offset * fourthOrder(t);
}

function fourthOrder(t: f64): f64 {
  if (abs(t) > SERIES_UP_TO) return log(1 + t) - t * (1 - t * (0.5 - t / 3));
  let power = -t * t * t * t;
  let sum = power / 4;
  let k: f64 = 5;
  while (true) {
    power *= -t;
    const next = sum + power / k;
    if (next == sum) return sum;
    sum = next;
    k += 1;
  }
}
