import { binRange, type Axis } from '../../src/study/axis';
import { exact, withUnit } from './number';

/** A column (or an outcome inside the axis) in words: "20 to 25 MeV", "below 20 MeV", a tag. */
export function bandTitle(axis: Axis, i: number): string {
  if (axis.kind === 'tags') return axis.tags[i] ?? '';
  const { first, end } = binRange(axis);
  if (i < first) return `below ${withUnit(exact(axis.edges[0]!), axis.unit)}`;
  if (i >= end) return `above ${withUnit(exact(axis.edges.at(-1)!), axis.unit)}`;
  const lo = axis.edges[i - first]!;
  const hi = axis.edges[i - first + 1]!;
  return withUnit(`${short(lo, hi - lo)} to ${short(hi, hi - lo)}`, axis.unit);
}

/** An outcome in words; the one past the axis' own is "lost". */
export function outcomeTitle(axis: Axis, k: number): string {
  return k >= bandCount(axis) ? 'lost' : bandTitle(axis, k);
}

/** Columns of a true axis; outcomes of a reconstructed one without `lost`. */
export function bandCount(axis: Axis): number {
  const { end } = binRange(axis);
  return axis.kind === 'tags' ? end : end + 1;
}

/** The indices of an axis' bands in the order of the picture: `lost`, `below`, the bins, `above`. */
export function bandOrder(axis: Axis, lost: boolean): number[] {
  const inside = Array.from({ length: bandCount(axis) }, (_, i) => i);
  return lost ? [inside.length, ...inside] : inside;
}

/** An edge of more characters than this was computed, not chosen. */
const CHOSEN = 7;

/** An edge as a name: in full where it is a short number, else to a hundredth of its bin or better. */
export function short(edge: number, width: number): string {
  const clean = Number(edge.toPrecision(12));
  if (String(clean).length <= CHOSEN) return exact(clean);
  const decimals = 2 - Math.floor(Math.log10(width));
  return exact(Number(clean.toFixed(Math.min(20, Math.max(0, decimals)))));
}
