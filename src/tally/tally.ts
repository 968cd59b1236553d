import type { Ledger } from './ledger';

/**
 * A finished tally: plain arrays that everything after the reading works on. Arrays are C order; `columns` true bins
 * (or tags) by `outcomes`, named in `columnNames` and `outcomeNames`.
 */
export interface Tally {
  columnNames: string[];
  outcomeNames: string[];
  /** Whether weights were read. Without them `weights` and `squares` are `null` everywhere. */
  weighted: boolean;
  /** `[columns, outcomes]`. */
  cells: Cells;
  /**
   * `[columns, 2, outcomes]`: lower and upper half of each true bin, split at its midpoint. A column that has no
   * midpoint (`below`, `above`, a tag) stands in its first half alone.
   */
  halves: Cells;
  /** `[runs, columns, outcomes]`, runs sorted by label; `null` where no run is read. */
  runs: { labels: string[]; cells: Cells } | null;
  /** `[columns]`: largest squared weight of one event; `null` without weights. */
  largestSquare: Float64Array | null;
  /** `[outcomes]`: rows reconstructed without a true value, where the study counts them; `null` elsewhere. */
  unmatched: Cells | null;
  /** Least and greatest true value tallied, on a numeric true axis with events; `null` elsewhere. */
  trueRange: { least: number; greatest: number } | null;
  ledger: Ledger;
  duplicates: Duplicates | null;
}

/** Events `n`, weights `sum w`, squared weights `sum w^2`, cell by cell. */
export interface Cells {
  events: Float64Array;
  weights: Float64Array | null;
  squares: Float64Array | null;
}

/** Event identities seen more than once; `null` in a tally where no identity is read. */
export interface Duplicates {
  /** Identities that repeat, and the rows in excess of one each. */
  identities: number;
  rows: number;
  /** Places of the first repeats, `file:line` or `file row n`, at most `MOST_EXAMPLES` groups. */
  examples: string[][];
}

/** How many columns and outcomes a tally has. */
export function shapeOf(tally: Tally): { columns: number; outcomes: number } {
  return { columns: tally.columnNames.length, outcomes: tally.outcomeNames.length };
}

/** Sums of each row of a `[rows, length]` array: column totals of a `[columns, outcomes]` one. */
export function rowSums(values: Float64Array, length: number): Float64Array {
  const sums = new Float64Array(values.length / length);
  for (let i = 0, at = 0; i < sums.length; i++) {
    let sum = 0;
    for (let k = 0; k < length; k++) sum += values[at++]!;
    sums[i] = sum;
  }
  return sums;
}
