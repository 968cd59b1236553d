import { scaleLinear } from 'd3';
import { exact, superscript, THIN, TIMES, value } from '../words/number';

export interface Tick {
  value: number;
  /** Empty for a minor tick of a log axis. */
  text: string;
}

/** A scale is read from two places at least; three, where there is room for three. */
const FEWEST = 3;
const DIGITS = [1, 2, 3, 4, 5, 6, 7, 8, 9];
const ROUND = [1, 2, 5];
/** A log axis of fewer decades than this is read by even steps: it has no two powers of ten. */
const NARROW = 0.7;

/** About `room / spacing` ticks over `[from, to]`, with labels that tell them apart. */
export function ticksOf(kind: 'linear' | 'log', from: number, to: number, room: number, spacing: number): Tick[] {
  const most = Math.max(2, Math.floor(room / spacing));
  if (!(to > from)) return [{ value: from, text: value(from) }];
  return kind === 'log' && from > 0 ? logTicks(from, to, most) : linearTicks(from, to, most);
}

/** About so many pixels a character of a label takes, and two labels keep apart. */
const CHARACTER = 8;
const APART = 10;

/** Ticks of an axis that runs across: as many as their labels leave room for beside one another. */
export function ticksAcross(kind: 'linear' | 'log', from: number, to: number, room: number, spacing: number): Tick[] {
  const ticks = ticksOf(kind, from, to, room, spacing);
  const longest = Math.max(...ticks.map(({ text }) => text.length));
  const needed = longest * CHARACTER + APART;
  const named = ticks.filter(({ text }) => text !== '').length;
  return needed <= spacing || needed * named <= room ? ticks : ticksOf(kind, from, to, room, needed);
}

function linearTicks(from: number, to: number, most: number): Tick[] {
  const scale = scaleLinear([from, to], [0, 1]);
  let values = scale.ticks(most);
  // A range just short of its round numbers would be left with one tick: a step finer still has room.
  for (let n = most + 1; values.length < FEWEST && n <= 2 * most; n++) values = scale.ticks(n);
  return values.map((v) => ({ value: v, text: tickText(v) }));
}

function logTicks(from: number, to: number, most: number): Tick[] {
  const decades = Math.log10(to / from);
  if (decades < NARROW) return linearTicks(from, to, most);
  const every = Math.ceil(decades / most);
  // Where there is room the ticks at 2 and 5 are named too.
  const named = ROUND.length * decades <= most ? ROUND : [1];
  const ticks: Tick[] = [];
  for (let e = Math.ceil(Math.log10(from) - 1); e <= Math.log10(to); e++) {
    for (const digit of every === 1 ? DIGITS : [1]) {
      const value = Number(`${digit}e${e}`);
      const text = named.includes(digit) && e % every === 0 ? logText(digit, e) : '';
      if (value >= from && value <= to) ticks.push({ value, text });
    }
  }
  return ticks;
}

/** 0.001 to 50 000 in full, other powers of ten as such. */
function logText(digit: number, exponent: number): string {
  const value = Number(`${digit}e${exponent}`);
  if (exponent >= -3 && exponent <= 4) return exact(value);
  return digit === 1 ? `10${superscript(exponent)}` : tickText(value);
}

/** A tick is a short decimal: its own digits, freed of binary noise, as a power of ten where it is long. */
export function tickText(v: number): string {
  const clean = Number(v.toPrecision(12));
  const size = Math.abs(clean);
  if (size === 0 || (size >= 1e-4 && size < 1e6)) return exact(clean);
  const [mantissa, exponent] = clean.toExponential().split('e');
  const power = `10${superscript(Number(exponent))}`;
  const lead = exact(Number(mantissa));
  return lead === '1' ? power : `${lead}${THIN}${TIMES}${THIN}${power}`;
}

/** A domain with a little air above, from zero where zero means something. */
export function domainOf(values: Iterable<number>, options: { zero: boolean; log: boolean }): [number, number] {
  let least = Infinity;
  let greatest = -Infinity;
  for (const v of values) {
    if (!Number.isFinite(v) || (options.log && !(v > 0))) continue;
    if (v < least) least = v;
    if (v > greatest) greatest = v;
  }
  if (least > greatest) return options.log ? [0.1, 1] : [0, 1];
  if (options.log) return [least === greatest ? least / 2 : least / 1.2, greatest * 1.2];
  const low = options.zero ? Math.min(0, least) : least;
  const high = options.zero ? Math.max(0, greatest) : greatest;
  const air = (high - low) * 0.05 || Math.abs(high) * 0.05 || 1;
  if (low === 0 && high === 0) return [0, 1];
  return [low === 0 ? 0 : low - air, high === 0 ? 0 : high + air];
}
