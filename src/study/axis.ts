/** Outcome and column names that stand for values outside an axis, and for events never reconstructed. */
export const BELOW = 'below';
export const ABOVE = 'above';
export const LOST = 'lost';

export interface NumericAxis {
  kind: 'numeric';
  label: string;
  unit: string;
  spacing: 'linear' | 'log';
  /** `bins + 1` increasing edges; bin `i` is `[edges[i], edges[i + 1])`, the last one too. */
  edges: Float64Array;
}

export interface TagAxis {
  kind: 'tags';
  label: string;
  unit: '';
  tags: string[];
}

export type Axis = NumericAxis | TagAxis;

/** How many bins (or tags) lie inside the axis, without `below`, `above` and `lost`. */
export function binCount(axis: Axis): number {
  return axis.kind === 'tags' ? axis.tags.length : axis.edges.length - 1;
}

/** Names of the columns of a true axis: `below`, the bins, `above`; or the tags. */
export function columnNames(axis: Axis): string[] {
  return axis.kind === 'tags' ? [...axis.tags] : [BELOW, ...binNames(axis), ABOVE];
}

/** Names of the outcomes of a reconstructed axis: the columns' names and, where losses are recorded, `lost`. */
export function outcomeNames(axis: Axis, lostRecorded: boolean): string[] {
  const inside = columnNames(axis);
  return lostRecorded ? [...inside, LOST] : inside;
}

/** Where the bins of an axis stand in the list of its columns or outcomes: `[first, end)`. */
export function binRange(axis: Axis): { first: number; end: number } {
  const first = axis.kind === 'tags' ? 0 : 1;
  return { first, end: first + binCount(axis) };
}

function binNames(axis: NumericAxis): string[] {
  const names: string[] = [];
  for (let i = 0; i + 1 < axis.edges.length; i++) names.push(`[${axis.edges[i]}, ${axis.edges[i + 1]})`);
  return names;
}

/** The value that splits bin `i` in two halves: its midpoint, geometric on a log axis. */
export function midpoint(axis: NumericAxis, i: number): number {
  const lo = axis.edges[i]!;
  const hi = axis.edges[i + 1]!;
  return axis.spacing === 'log' ? Math.sqrt(lo) * Math.sqrt(hi) : lo + (hi - lo) / 2;
}

/** True where both axes are numeric with the same edges: purity and stability have a meaning only there. */
export function axesMatch(a: Axis, b: Axis): boolean {
  if (a.kind === 'tags' || b.kind === 'tags') {
    return a.kind === b.kind && JSON.stringify((a as TagAxis).tags) === JSON.stringify((b as TagAxis).tags);
  }
  return a.edges.length === b.edges.length && a.edges.every((edge, i) => edge === b.edges[i]);
}

/**
 * The `bins + 1` edges of an evenly spaced axis from `from` to `to`. Both ends are met exactly. Edge `i` of a linear
 * axis is `from + i * ((to - from) / bins)`, the rounding of `numpy.linspace`, so that counts agree to the last one.
 */
export function evenEdges(from: number, to: number, bins: number, spacing: 'linear' | 'log'): Float64Array {
  const edges = new Float64Array(bins + 1);
  const step = (to - from) / bins;
  const logStep = Math.log(to / from) / bins;
  for (let i = 0; i < bins; i++) edges[i] = spacing === 'log' ? from * Math.exp(i * logStep) : from + i * step;
  edges[0] = from;
  edges[bins] = to;
  return edges;
}
