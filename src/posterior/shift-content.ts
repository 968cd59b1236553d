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
  const startOf = (i: number): number => (i < first ? -Infinity : edges[i - first]!);
  const endOf = (i: number): number => (i < end ? edges[i - first + 1]! : Infinity);
  // Both lists of bins increase, so a bin that one source bin has passed is passed by all after it.
  let reached = first - 1;
  for (let k = first; k < end; k++) {
    const [lo, hi] = [startOf(k) + distance, endOf(k) + distance];
    while (endOf(reached) <= lo) reached++;
    for (let i = reached; startOf(i) < hi && i <= end; i++) {
      const overlap = Math.min(hi, endOf(i)) - Math.max(lo, startOf(i));
      moved[i]! += content[k]! * (overlap / (hi - lo));
    }
  }
  return moved;
}
