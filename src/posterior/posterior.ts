import type { Cells } from '../tally/tally';
import { rowSums } from '../tally/tally';
import type { PriorCounts } from './prior';

/**
 * The posterior of every column: independent gamma variates `X_k ~ scale_k * Gamma(shape_k)`, `p = X / sum X`.
 * With equal scales in a column (unit or equal weights) this is `Dirichlet(shape)`.
 * Arrays are `[columns, outcomes]`, C order.
 */
export interface Posterior {
  columns: number;
  outcomes: number;
  shape: Float64Array;
  /** `null` where events are unweighted. */
  scale: Float64Array | null;
  /** The prior's pseudo-counts, `[columns, outcomes]`. */
  prior: Float64Array;
  /** `[columns]`: effective entries `W^2 / V` (Kish 1965), the number of events where unweighted. */
  effective: Float64Array;
  /** Cells that have events but no positive weight: they keep their prior alone. */
  clamped: number[];
}

/**
 * Posterior of the columns of a tally (statistics.md 3). Unweighted: `shape = a0 + n`. Weighted: a cell with positive
 * weight has `shape = W^2/V + a0` and `scale = V/W`; another has its prior's shape at the column's mean weight scale
 * `V_j/W_j` (1 in a column without weight). A column of equal weights is the unweighted one exactly.
 */
export function posteriorOf(cells: Cells, prior: PriorCounts): Posterior {
  const { columns, outcomes } = prior;
  const shape = cells.events.map((n, i) => n + prior.counts[i]!);
  const effective = effectiveEntries(cells, outcomes);
  const { weights, squares } = cells;
  if (!weights || !squares) {
    return { columns, outcomes, shape, scale: null, prior: prior.counts, effective, clamped: [] };
  }
  const scale = new Float64Array(shape.length);
  const clamped: number[] = [];
  for (let j = 0; j < columns; j++) {
    const [from, end] = [j * outcomes, (j + 1) * outcomes];
    const meanScale = meanWeightScale(weights, squares, from, outcomes);
    scale.fill(meanScale, from, end);
    if (hasEqualWeights(cells.events, weights, squares, from, end, meanScale)) {
      effective[j] = cells.events.subarray(from, end).reduce((sum, n) => sum + n, 0);
      continue;
    }
    for (let i = from; i < end; i++) {
      const positive = weights[i]! > 0;
      if (positive) scale[i] = squares[i]! / weights[i]!;
      shape[i] = prior.counts[i]! + (positive ? weights[i]! / scale[i]! : 0);
      if (!positive && cells.events[i]! > 0) clamped.push(i);
    }
  }
  return { columns, outcomes, shape, scale, prior: prior.counts, effective, clamped };
}

/** Sums of equal weights are rounded, each by a few units in the last place; weights that differ, differ by more. */
const SUM_ROUNDING = 16 * Number.EPSILON;

function hasEqualWeights(
  events: Float64Array,
  weights: Float64Array,
  squares: Float64Array,
  from: number,
  end: number,
  weight: number,
): boolean {
  for (let i = from; i < end; i++) {
    const sum = events[i]! * weight;
    const isSame = Math.abs(weights[i]! - sum) <= SUM_ROUNDING * sum;
    if (!isSame || Math.abs(squares[i]! - sum * weight) > SUM_ROUNDING * sum * weight) return false;
  }
  return true;
}

/** `n_eff = W_j^2 / V_j` from column totals (Kish 1965); 0 for a column without events or without positive weight. */
export function effectiveEntries(cells: Cells, outcomes: number): Float64Array {
  if (!cells.weights || !cells.squares) return rowSums(cells.events, outcomes);
  const squares = rowSums(cells.squares, outcomes);
  return rowSums(cells.weights, outcomes).map((w, j) => (w > 0 && squares[j]! > 0 ? w / (squares[j]! / w) : 0));
}

function meanWeightScale(weights: Float64Array, squares: Float64Array, from: number, length: number): number {
  let w = 0;
  let v = 0;
  for (let i = from; i < from + length; i++) {
    if (!(weights[i]! > 0)) continue;
    w += weights[i]!;
    v += squares[i]!;
  }
  return w > 0 ? v / w : 1;
}

/** Shapes and scales of column `j` as views. `scale` is `null` where the column is a Dirichlet. */
export function columnOf(
  posterior: Pick<Posterior, 'outcomes' | 'shape' | 'scale'>,
  j: number,
): { shape: Float64Array; scale: Float64Array | null } {
  const from = j * posterior.outcomes;
  const shape = posterior.shape.subarray(from, from + posterior.outcomes);
  const scale = posterior.scale?.subarray(from, from + posterior.outcomes) ?? null;
  return { shape, scale: scale && scale.some((s) => s !== scale[0]) ? scale : null };
}

/** True where column `j` has no events and a prior of zero: it has no posterior, and an ensemble cannot be drawn. */
export function hasNoPosterior(posterior: Posterior, j: number): boolean {
  return columnOf(posterior, j).shape.every((a) => a === 0);
}
