import type { Cells } from '../tally/tally';
import type { GroupTable } from './homogeneity';

/**
 * Contents of one column in several groups: `cells` is `[groups, columns, outcomes]`. Weighted contents that are not
 * positive count as 0; an outcome's scale is that of all groups together.
 */
export function groupTableOf(
  cells: Cells,
  shape: { groups: number; columns: number; outcomes: number },
  column: number,
): GroupTable {
  const { groups, outcomes } = shape;
  const pick = (values: Float64Array): Float64Array =>
    Float64Array.from({ length: groups * outcomes }, (_, i) => {
      const group = Math.floor(i / outcomes);
      return values[(group * shape.columns + column) * outcomes + (i % outcomes)]!;
    });
  if (!cells.weights || !cells.squares) return { groups, outcomes, contents: pick(cells.events), scale: null };
  const weights = pick(cells.weights);
  const squares = pick(cells.squares);
  const contents = weights.map((w) => Math.max(0, w));
  return { groups, outcomes, contents, scale: scalesOf(contents, squares, outcomes) };
}

function scalesOf(contents: Float64Array, squares: Float64Array, outcomes: number): Float64Array {
  const w = new Float64Array(outcomes);
  const v = new Float64Array(outcomes);
  contents.forEach((content, i) => {
    if (!(content > 0)) return;
    w[i % outcomes]! += content;
    v[i % outcomes]! += squares[i]!;
  });
  return v.map((square, k) => (w[k]! > 0 ? square / w[k]! : 1));
}
