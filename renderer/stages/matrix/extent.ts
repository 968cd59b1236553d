import type { Axis } from '../../../src/study/axis';
import type { View } from '../../draw/bands';
import type { Extent } from '../../draw/scale';

/** The values at the two ends of the part in view; `null` where a picture has names instead of a scale. */
export function extentOf(axis: Axis, view: View, equal: boolean): Extent | null {
  if (axis.kind === 'tags') return null;
  const { edges, spacing } = axis;
  if (equal && !isEven(edges, spacing)) return null;
  const a = edges[0]!;
  const b = edges.at(-1)!;
  if (spacing === 'log') {
    return { kind: 'log', from: a * (b / a) ** view.from, to: a * (b / a) ** view.to };
  }
  return { kind: 'linear', from: a + (b - a) * view.from, to: a + (b - a) * view.to };
}

/** Even to what a picture can show: a thousandth of a bin. */
const EVEN = 1e-3;

/** Whether equal widths are true to scale anyway. */
export function isEven(edges: Float64Array, spacing: 'linear' | 'log'): boolean {
  const place = spacing === 'log' ? Math.log : Number;
  const bins = edges.length - 1;
  const first = place(edges[0]!);
  const step = (place(edges[bins]!) - first) / bins;
  return edges.every((edge, i) => Math.abs(place(edge) - first - i * step) <= EVEN * step);
}
