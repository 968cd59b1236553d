import { binRange, midpoint, type Axis } from '../../../src/study/axis';
import type { Axes } from '../../bench/axes';
import { runShares, variation } from './run-shares';

export interface DriftCells {
  /** `[columns, runs]` each; NaN where a run has no event in the column. */
  events: Float64Array;
  /** Total-variation distance from all runs together. */
  distance: Float64Array;
  /** Shift of the mean reconstructed value (inside the window) in units of its own standard deviation. */
  shift: Float64Array;
}

interface Shape {
  columnNames: readonly string[];
  outcomeNames: readonly string[];
}

/** How far each run lies from all runs together, column by column, from events `[runs, columns, outcomes]`. */
export function driftCells(events: Float64Array, runs: number, shape: Shape, axes: Axes): DriftCells {
  const columns = shape.columnNames.length;
  const cells = columns * runs;
  const result = { events: new Float64Array(cells), distance: new Float64Array(cells), shift: new Float64Array(cells) };
  const centres = centresOf(axes.reconstructed);
  for (let j = 0; j < columns; j++) {
    const { runs: each, pool } = runShares(events, runs, shape, j);
    const whole = momentsOver(pool.shares, centres);
    each.forEach(({ events: n, shares }, r) => {
      const i = j * runs + r;
      const own = momentsOver(shares, centres);
      result.events[i] = n;
      result.distance[i] = n > 0 ? variation(shares, pool.shares) : NaN;
      // The sd of a mean of n events drawn from the pool, the part of the pool that is the run itself allowed for.
      const sd = Math.sqrt((whole.variance / (n * own.inside)) * Math.max(0, 1 - n / pool.events));
      result.shift[i] = n > 0 && sd > 0 ? (own.mean - whole.mean) / sd : NaN;
    });
  }
  return result;
}

/** Middle of each bin by its place among the outcomes; NaN for outcomes outside of the window. */
export function centresOf(axis: Axis): Float64Array {
  const { first, end } = binRange(axis);
  const centres = new Float64Array(end + 2).fill(NaN);
  for (let k = first; k < end; k++) centres[k] = axis.kind === 'tags' ? k : midpoint(axis, k - first);
  return centres;
}

export function momentsOver(
  shares: Float64Array,
  centres: Float64Array,
): { mean: number; variance: number; inside: number } {
  let inside = 0;
  let sum = 0;
  let squares = 0;
  shares.forEach((p, k) => {
    const x = centres[k]!;
    if (!Number.isFinite(x)) return;
    inside += p;
    sum += p * x;
    squares += p * x * x;
  });
  const mean = sum / inside;
  return { mean, variance: squares / inside - mean ** 2, inside };
}
