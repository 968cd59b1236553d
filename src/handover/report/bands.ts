import { binRange, type Axis, type NumericAxis } from '../../study/axis';
import { ticksOn, type Tick } from './ticks';

/** Where the columns (or outcomes) of an axis lie along one side of a picture, and the ticks of that side. */
export interface Bands {
  length: number;
  /** Start and end of each band, by index; they are apart where a gap divides outer bands from the window. */
  from: Float64Array;
  to: Float64Array;
  ticks: Tick[];
  title: string;
}

/** Widths of an outer band and of the gap beside it, in the units of the picture. */
const OUTER = 30;
const GAP = 9;
/** Room that a label takes along its side: words lie across, and stand above each other up. */
const ROOM = { across: { tag: 64, tick: 44 }, up: { tag: 12, tick: 24 } };
type Side = keyof typeof ROOM;

/** Lays the bands of an axis: `lost` where there is such an outcome, `below`, the bins true to scale, `above`; or tags. */
export function axisBands(axis: Axis, hasLost: boolean, length: number, side: Side = 'across'): Bands {
  const title = axis.unit ? `${axis.label}, ${axis.unit}` : axis.label;
  const start = hasLost ? OUTER + GAP : 0;
  const bands =
    axis.kind === 'tags'
      ? evenBands(axis.tags, start, length, title, side)
      : numericBands(axis, start, length, title, side);
  return hasLost ? withBand(bands, 0, OUTER, 'lost') : bands;
}

/** Equal bands with a label each, as many labels as there is room for. */
export function evenBands(
  labels: readonly string[],
  start: number,
  length: number,
  title: string,
  side: Side = 'across',
): Bands {
  const step = (length - start) / labels.length;
  // Ends and starts that meet are the same number.
  const edges = Float64Array.from({ length: labels.length + 1 }, (_, i) => start + i * step);
  const every = Math.ceil(ROOM[side].tag / step);
  const ticks = labels.flatMap((text, i) =>
    i % every === 0 ? [{ at: start + (i + 0.5) * step, text: shortened(text, side, every * step) }] : [],
  );
  return { length, from: edges.subarray(0, -1), to: edges.subarray(1), ticks, title };
}

/** Letters of a label beside a picture, and the width of one below it. */
const BESIDE = 8;
const LETTER = 6;

function shortened(text: string, side: Side, room: number): string {
  const longest = side === 'up' ? BESIDE : Math.floor(room / LETTER);
  return text.length > longest ? `${text.slice(0, longest - 1)}…` : text;
}

function numericBands(
  { edges, spacing }: NumericAxis,
  start: number,
  length: number,
  title: string,
  side: Side,
): Bands {
  const [least, most] = [edges[0]!, edges[edges.length - 1]!];
  const [low, high] = [start + OUTER + GAP, length - OUTER - GAP];
  const ticks = ticksOn({ kind: spacing, from: least, to: most, low, high }, ROOM[side].tick);
  const scale = (value: number): number => (spacing === 'log' ? Math.log(value) : value);
  const place = (value: number): number =>
    low + ((scale(value) - scale(least)) / (scale(most) - scale(least))) * (high - low);
  const at = edges.map(place);
  const inner: Bands = { length, from: at.subarray(0, -1), to: at.subarray(1), ticks, title };
  const below = withBand(inner, start, start + OUTER, 'below', true);
  return withBand(below, length - OUTER, length, 'above');
}

function withBand(bands: Bands, from: number, to: number, text: string, isFirst = false): Bands {
  const join = (all: Float64Array, one: number): Float64Array =>
    Float64Array.from(isFirst ? [one, ...all] : [...all, one]);
  const ticks = [...bands.ticks, { at: (from + to) / 2, text }];
  return { ...bands, from: join(bands.from, from), to: join(bands.to, to), ticks };
}

/** The bins of an axis alone, without its outer bands: what is measured over reconstructed bins. */
export function windowBands(axis: Axis, length: number): Bands {
  const all = axisBands(axis, false, length);
  const { first, end } = binRange(axis);
  const isOuter = ({ at }: Tick): boolean => axis.kind === 'numeric' && (at < OUTER || at > length - OUTER);
  return {
    ...all,
    from: all.from.subarray(first, end),
    to: all.to.subarray(first, end),
    ticks: all.ticks.filter((tick) => !isOuter(tick)),
  };
}
