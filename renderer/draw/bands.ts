import { binCount, binRange, type Axis } from '../../src/study/axis';

/** Where each column (or outcome) of an axis lies along one side of a picture, in CSS pixels from the axis' start. */
export interface Bands {
  /** `[names]`: start and end of each band, in the order of the axis' names; both `NaN` where it is out of view. */
  from: Float64Array;
  to: Float64Array;
  /** The part that the bins share; outer bands lie beside it, behind a gap. */
  window: { from: number; to: number };
  /** Position of a value of the axis inside the window; it may lie outside of it. `null` for tags. */
  place: ((value: number) => number) | null;
}

export interface BandsRequest {
  axis: Axis;
  /** Whether a `lost` band stands before `below`. */
  lost: boolean;
  length: number;
  /** Every bin as wide as the others, instead of true to scale. */
  equal: boolean;
  /** The part of the window in view, as shares of its length. */
  view: View;
}

export interface View {
  from: number;
  to: number;
}

export const WHOLE: View = { from: 0, to: 1 };
export const GAP = 8;
const OUTER = 16;
const BETWEEN_OUTER = 4;

/** Lays the bands of an axis: `lost`, `below`, gap, bins, gap, `above`. */
export function layBands({ axis, lost, length, equal, view }: BandsRequest): Bands {
  const outer = axis.kind === 'numeric';
  const lostSpace = lost ? OUTER + (outer ? BETWEEN_OUTER : GAP) : 0;
  const before = lostSpace + (outer ? OUTER + GAP : 0);
  const window = { from: before, to: Math.max(before + 1, length - (outer ? OUTER + GAP : 0)) };
  const { first, end } = binRange(axis);
  const total = end + (outer ? 1 : 0) + (lost ? 1 : 0);
  const from = new Float64Array(total).fill(NaN);
  const to = new Float64Array(total).fill(NaN);
  const put = (i: number, a: number, b: number) => {
    from[i] = a;
    to[i] = b;
  };
  if (outer) put(0, lostSpace, lostSpace + OUTER);
  if (outer) put(end, length - OUTER, length);
  if (lost) put(total - 1, 0, OUTER);
  layBins(binShares(axis, equal), view, window, (i, a, b) => put(first + i, a, b));
  return { from, to, window, place: placer(axis, equal, view, window) };
}

function layBins(
  shares: Float64Array,
  view: View,
  window: View,
  put: (bin: number, from: number, to: number) => void,
): void {
  const scale = (window.to - window.from) / (view.to - view.from);
  const at = (share: number) => window.from + (share - view.from) * scale;
  for (let i = 0; i + 1 < shares.length; i++) {
    const a = Math.max(window.from, at(shares[i]!));
    const b = Math.min(window.to, at(shares[i + 1]!));
    if (b > a) put(i, a, b);
  }
}

/** `[bins + 1]`: where the edges of the bins stand, as shares of the window. */
export function binShares(axis: Axis, equal: boolean): Float64Array {
  const bins = binCount(axis);
  if (equal || axis.kind === 'tags') return Float64Array.from({ length: bins + 1 }, (_, i) => i / bins);
  const scale = axis.spacing === 'log' ? Math.log : Number;
  const a = scale(axis.edges[0]!);
  const b = scale(axis.edges[bins]!);
  return axis.edges.map((edge) => (scale(edge) - a) / (b - a));
}

function placer(axis: Axis, equal: boolean, view: View, window: View): Bands['place'] {
  if (axis.kind === 'tags') return null;
  const shares = binShares(axis, equal);
  const scale = (window.to - window.from) / (view.to - view.from);
  return (value) => window.from + (shareOf(value, axis.edges, shares, axis.spacing) - view.from) * scale;
}

/** The share of a value: exact at edges, on the axis' own scale between them. */
function shareOf(value: number, edges: Float64Array, shares: Float64Array, spacing: 'linear' | 'log'): number {
  const i = Math.min(edges.length - 2, Math.max(0, lastAtMost(edges, value)));
  const scale = spacing === 'log' ? Math.log : Number;
  const a = scale(edges[i]!);
  const b = scale(edges[i + 1]!);
  return shares[i]! + ((scale(value) - a) / (b - a)) * (shares[i + 1]! - shares[i]!);
}

function lastAtMost(edges: Float64Array, value: number): number {
  let low = 0;
  let high = edges.length;
  while (low < high) {
    const middle = (low + high) >> 1;
    if (edges[middle]! <= value) low = middle + 1;
    else high = middle;
  }
  return low - 1;
}

/** The band at a position, or -1 in a gap and outside. */
export function bandAt(bands: Bands, position: number): number {
  for (let i = 0; i < bands.from.length; i++) {
    if (position >= bands.from[i]! && position < bands.to[i]!) return i;
  }
  return -1;
}

/** `[pixels]`: the band of every device pixel along the side, by the pixel's centre; -1 in a gap. */
export function bandOfPixels(bands: Bands, pixels: number, perCss: number, flip = false): Int16Array {
  const of = new Int16Array(pixels).fill(-1);
  for (let i = 0; i < bands.from.length; i++) {
    const a = Math.max(0, Math.ceil(bands.from[i]! * perCss - 0.5));
    const b = Math.min(pixels, Math.ceil(bands.to[i]! * perCss - 0.5));
    for (let x = a; x < b; x++) of[flip ? pixels - 1 - x : x] = i;
  }
  return of;
}

/** A view made narrower (`factor < 1`) or wider about the share `at`, kept inside the whole. */
export function zoomed(view: View, factor: number, at: number, narrowest = 0.002): View {
  const size = Math.min(1, Math.max(narrowest, (view.to - view.from) * factor));
  const from = at - ((at - view.from) / (view.to - view.from)) * size;
  return moved({ from, to: from + size }, 0);
}

/** A view moved by a share, stopped at the ends. */
export function moved(view: View, by: number): View {
  const size = view.to - view.from;
  const from = Math.min(1 - size, Math.max(0, view.from + by));
  return { from, to: from + size };
}
