import { binRange, type Axis } from '../../src/study/axis';
import { exact, withUnit } from './number';

/** A column (or an outcome inside the axis) in words: "20 to 25 MeV", "below 20 MeV", a tag. */
export function bandTitle(axis: Axis, i: number): string {
  if (axis.kind === 'tags') return axis.tags[i] ?? '';
  const { first, end } = binRange(axis);
  if (i < first) return `below ${withUnit(exact(axis.edges[0]!), axis.unit)}`;
  if (i >= end) return `above ${withUnit(exact(axis.edges.at(-1)!), axis.unit)}`;
  return withUnit(`${short(axis.edges[i - first]!)} to ${short(axis.edges[i - first + 1]!)}`, axis.unit);
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

/** An edge without the digits that only binary arithmetic put there. */
export function short(edge: number): string {
  return exact(Number(edge.toPrecision(6)));
}
