import { resolveAxis } from '../../src/study/resolve-axis';
import type { AxisDocument } from '../../src/study/study';

type Spacing = 'linear' | 'log';

/**
 * A dragged edge stops before a neighbour, at this share of the two bins beside it (of the next bin, at an end): bins
 * stay wide enough to be taken hold of again, however long the drag.
 */
export const CLOSEST = 0.02;

/** The edges after one was moved: it stays between its neighbours, and above zero on a log axis. */
export function moveEdge(edges: readonly number[], i: number, to: number, spacing: Spacing): number[] {
  const before = edges[i - 1] ?? -Infinity;
  const after = edges[i + 1] ?? Infinity;
  const margin = CLOSEST * widthAround(edges, i);
  let value = Math.min(Math.max(to, before + margin), after - margin);
  if (!(value > before && value < after) || (spacing === 'log' && !(value > 0))) value = edges[i]!;
  return edges.map((edge, n) => (n === i ? value : edge));
}

/** Of what the edge itself does not change while it is moved: its neighbours' distance, or the next bin's width. */
function widthAround(edges: readonly number[], i: number): number {
  const before = edges[i - 1] ?? edges[i + 1]!;
  const after = edges[i + 1] ?? edges[i - 1]!;
  if (before !== after) return after - before;
  const beyond = i === 0 ? edges[2] : edges[i - 2];
  return Math.abs((beyond ?? edges[i]!) - before);
}

/** The edges with one more, unless it is there. */
export function addEdge(edges: readonly number[], value: number): number[] {
  if (edges.includes(value)) return [...edges];
  return [...edges, value].sort((a, b) => a - b);
}

/** The edges without one; two always stay. */
export function removeEdge(edges: readonly number[], i: number): number[] {
  return edges.length > 2 ? edges.filter((_, n) => n !== i) : [...edges];
}

export function nearestEdge(edges: ArrayLike<number>, place: (edge: number) => number, x: number): number {
  let best = 0;
  for (let i = 1; i < edges.length; i++) {
    if (Math.abs(place(edges[i]!) - x) < Math.abs(place(edges[best]!) - x)) best = i;
  }
  return best;
}

/** A value as a hand places it: no finer than `resolution`, a power of ten. */
export function handPlaced(value: number, resolution: number): number {
  const step = 10 ** Math.floor(Math.log10(resolution));
  const digits = Math.max(0, -Math.floor(Math.log10(resolution)));
  return Number((Math.round(value / step) * step).toFixed(Math.min(20, digits)));
}

/** Edges typed or pasted: numbers apart by spaces, commas, semicolons or lines. Answers the first text that is none. */
export function parseEdges(text: string): { edges: number[] } | { bad: string } {
  const parts = text.replaceAll('\u2212', '-').replace(/[[\]()]/g, ' ');
  const words = parts.split(/[\s,;]+/).filter(Boolean);
  const bad = words.find((word) => !Number.isFinite(Number(word)));
  return bad === undefined ? { edges: words.map(Number) } : { bad };
}

/** The edges of a numeric axis document; none for tags or for one that is not valid yet. */
export function edgesOf(axis: AxisDocument): number[] {
  if ('tags' in axis) return [];
  if ('edges' in axis) return axis.edges;
  if (!(axis.to > axis.from) || (axis.spacing === 'log' && !(axis.from > 0)) || !(axis.bins >= 1)) return [];
  const resolved = resolveAxis(axis);
  return resolved.kind === 'numeric' ? [...resolved.edges] : [];
}

/** The axis document with a list of edges in place of what it had. */
export function withEdges(axis: AxisDocument, edges: number[]): AxisDocument {
  const numeric = 'tags' in axis ? { unit: '', spacing: 'linear' as const } : axis;
  return { label: axis.label, unit: numeric.unit, edges, spacing: numeric.spacing };
}

/** The axis document with even bins, from the ends it has. */
export function withEvenBins(axis: AxisDocument, bins?: number): AxisDocument {
  if ('from' in axis) return { ...axis, bins: bins ?? axis.bins };
  const edges = edgesOf(axis);
  const numeric = 'tags' in axis ? { unit: '', spacing: 'linear' as const } : axis;
  return {
    label: axis.label,
    unit: numeric.unit,
    from: edges[0] ?? 0,
    to: edges.at(-1) ?? 1,
    bins: bins ?? Math.max(1, edges.length - 1),
    spacing: numeric.spacing,
  };
}
