import { binRange, type Axis } from '../study/axis';

/**
 * The content of a column, `[outcomes]`, moved along the reconstructed axis by `distance` in the axis's own coordinate
 * (`ln` of the value on a log axis) and binned again by area. What leaves the window goes `below` or `above`; what was
 * there already, and what was lost, stays: nobody knows where in the outside it lies. The total is kept.
 */
export function shiftContent(content: Float64Array, axis: Axis, distance: number): Float64Array {
  if (axis.kind === 'tags' || distance === 0) return content.slice();
  const edges = axis.spacing === 'log' ? axis.edges.map(Math.log) : axis.edges;
  const { first, end } = binRange(axis);
  const moved = content.slice().fill(0, first, end);
  for (let k = first; k < end; k++) {
    const [lo, hi] = [edges[k - first]!, edges[k - first + 1]!];
    const density = content[k]! / (hi - lo);
    for (let i = first - 1; i <= end; i++) {
      const from = i < first ? -Infinity : edges[i - first]!;
      const to = i < end ? edges[i - first + 1]! : Infinity;
      const overlap = Math.min(hi + distance, to) - Math.max(lo + distance, from);
      if (overlap > 0) moved[i]! += density * overlap;
    }
  }
  return moved;
}
