import { formatNumber } from '../../audit/wording';

export interface Tick {
  /** Place along the side, in the units of the picture. */
  at: number;
  /** Empty for a tick without a label. */
  text: string;
}

/** A scale of values onto places: `from` lies at `low`, `to` at `high`; on a log scale both are above 0. */
export interface Scale {
  kind: 'linear' | 'log';
  from: number;
  to: number;
  low: number;
  high: number;
}

/** The place of a value, never outside the scale. */
export function placeOn({ kind, from, to, low, high }: Scale, value: number): number {
  const inside = Math.min(to, Math.max(from, value));
  const share = kind === 'log' ? Math.log(inside / from) / Math.log(to / from) : (inside - from) / (to - from);
  return low + share * (high - low);
}

/** Steps between ticks within a decade, as people count. */
const STEPS = [1, 2, 5, 10];
/** Digits of a tick: enough for every one, trailing zeros do not show. */
const TICK_DIGITS = 12;
/** With fewer decades than these on a log scale, ticks stand between the powers of ten too. */
const FEW_DECADES = 2;

/** Ticks on a scale, about `room` apart or more. */
export function ticksOn(scale: Scale, room: number): Tick[] {
  const most = Math.max(2, Math.floor(Math.abs(scale.high - scale.low) / room));
  const values = scale.kind === 'log' ? logValues(scale, most) : linearValues(scale, most);
  return values.map((value) => ({ at: placeOn(scale, value), text: formatNumber(value, TICK_DIGITS) }));
}

function linearValues({ from, to }: Scale, most: number): number[] {
  const rough = (to - from) / most;
  const decade = 10 ** Math.floor(Math.log10(rough));
  const step = decade * STEPS.find((s) => decade * s >= rough * (1 - Number.EPSILON))!;
  const first = Math.ceil(from / step - ROUNDING);
  const count = Math.floor(to / step + ROUNDING) - first + 1;
  // A product of whole steps, freed of binary noise.
  return Array.from({ length: count }, (_, i) => Number(((first + i) * step).toPrecision(TICK_DIGITS)));
}

/** Part of a step that binary arithmetic may put an end of the scale beside a tick. */
const ROUNDING = 1e-9;

function logValues({ from, to }: Scale, most: number): number[] {
  const [first, last] = [Math.floor(Math.log10(from)), Math.ceil(Math.log10(to))];
  const decades = Math.log10(to / from);
  const every = Math.max(1, Math.ceil(decades / most));
  const within = decades <= FEW_DECADES && 3 * decades <= most + 1 ? [1, 2, 5] : [1];
  const values: number[] = [];
  for (let e = first; e <= last; e += 1) {
    if (e % every === 0) for (const lead of within) values.push(Number(`${lead}e${e}`));
  }
  return values.filter((value) => value >= from * (1 - ROUNDING) && value <= to * (1 + ROUNDING));
}
