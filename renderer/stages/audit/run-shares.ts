interface Shape {
  columnNames: readonly string[];
  outcomeNames: readonly string[];
}

export interface Shares {
  events: number;
  /** `[outcomes]`; all zero for a run without events in the column. */
  shares: Float64Array;
}

/** Shares of the outcomes in one column, run by run and of all runs together, from events `[runs, columns, outcomes]`. */
export function runShares(
  events: Float64Array,
  runs: number,
  shape: Shape,
  column: number,
): { runs: Shares[]; pool: Shares } {
  const columns = shape.columnNames.length;
  const outcomes = shape.outcomeNames.length;
  const pool = new Float64Array(outcomes);
  const each = Array.from({ length: runs }, (_, r) => {
    const from = (r * columns + column) * outcomes;
    const counts = events.subarray(from, from + outcomes);
    counts.forEach((n, k) => (pool[k] = pool[k]! + n));
    return sharesOf(counts);
  });
  return { runs: each, pool: sharesOf(pool) };
}

function sharesOf(counts: Float64Array): Shares {
  const events = counts.reduce((a, b) => a + b, 0);
  return { events, shares: counts.map((n) => (events > 0 ? n / events : 0)) };
}

/** Total-variation distance of two distributions: half the summed absolute difference. */
export function variation(a: Float64Array, b: Float64Array): number {
  return a.reduce((sum, x, i) => sum + Math.abs(x - b[i]!), 0) / 2;
}
