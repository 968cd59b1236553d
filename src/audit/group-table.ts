import type { Cells } from '../tally/tally';
import type { GroupTable } from './homogeneity';

/**
 * Contents of one column in several groups: `cells` is `[groups, columns, outcomes]`. Weighted contents are given in effective
 * entries of their group (`W / V` times the weight, with the group's totals `W` and `V`), so that groups of different weight scale can be
 * held against each other; contents that are not positive count as 0, and an outcome's scale is that of all groups together.
 */
export function groupTableOf(
  cells: Cells,
  shape: { groups: number; columns: number; outcomes: number },
  column: number,
): GroupTable {
  const { groups, columns, outcomes } = shape;
  const pick = (values: Float64Array): Float64Array => {
    const picked = new Float64Array(groups * outcomes);
    for (let g = 0; g < groups; g++) {
      const from = (g * columns + column) * outcomes;
      picked.set(values.subarray(from, from + outcomes), g * outcomes);
    }
    return picked;
  };
  if (!cells.weights || !cells.squares) return { groups, outcomes, contents: pick(cells.events), scale: null };
  return inEffectiveEntries(groups, outcomes, pick(cells.weights), pick(cells.squares));
}

function inEffectiveEntries(
  groups: number,
  outcomes: number,
  weights: Float64Array,
  squares: Float64Array,
): GroupTable {
  const contents = new Float64Array(groups * outcomes);
  const [sums, spreads] = [new Float64Array(outcomes), new Float64Array(outcomes)];
  for (let g = 0; g < groups; g++) {
    const from = g * outcomes;
    const unit = effectivePerWeight(weights.subarray(from, from + outcomes), squares.subarray(from, from + outcomes));
    for (let k = 0; k < outcomes; k++) {
      if (!(weights[from + k]! > 0)) continue;
      contents[from + k] = weights[from + k]! * unit;
      sums[k]! += contents[from + k]!;
      spreads[k]! += squares[from + k]! * unit * unit;
    }
  }
  return { groups, outcomes, contents, scale: spreads.map((v, k) => (sums[k]! > 0 ? v / sums[k]! : 1)) };
}

/** `W / V` over the outcomes of positive weight; 0 where there are none. */
function effectivePerWeight(weights: Float64Array, squares: Float64Array): number {
  let w = 0;
  let v = 0;
  for (let k = 0; k < weights.length; k++) {
    if (!(weights[k]! > 0)) continue;
    w += weights[k]!;
    v += squares[k]!;
  }
  return w > 0 ? w / v : 0;
}
