import type { Axis } from '../study/axis';

/** Cells of the look-up grid a bin: enough that a cell rarely holds an edge. */
const GRID_PER_BIN = 16;
/** Most edges in one grid cell that are searched one by one; beyond, the search halves. */
const FEW = 4;

/** Turns values into places on an axis. */
export interface Binner {
  /**
   * Writes the place of `values[i]` into `places[i]` for `i < rows`. On a numeric axis 0 is `below`, bin `b` of
   * `[lo, hi)` is `b + 1`, and `bins + 1` is `above`; a value equal to the top edge is `above`. On a tag axis the
   * values are tag indices already. `NaN` is written as -1.
   */
  places(values: Float64Array, rows: number, places: Int32Array): void;
}

/** The binner of an axis. Comparisons are made with the edges themselves, so that places are exact. */
export function binnerOf(axis: Axis): Binner {
  return axis.kind === 'tags' ? { places: tagPlaces } : edgeBinner(axis.edges);
}

function tagPlaces(values: Float64Array, rows: number, places: Int32Array): void {
  for (let i = 0; i < rows; i++) places[i] = values[i] === values[i] ? values[i]! : -1;
}

function edgeBinner(edges: Float64Array): Binner {
  const bins = edges.length - 1;
  const lowest = edges[0]!;
  const highest = edges[bins]!;
  const cells = bins * GRID_PER_BIN;
  const perUnit = cells / (highest - lowest);
  const { starts, ends } = searchGrid(edges, perUnit, cells);

  const crowded = starts.some((start, c) => ends[c]! - start > FEW);

  function places(values: Float64Array, rows: number, into: Int32Array): void {
    for (let i = 0; i < rows; i++) {
      const x = values[i]!;
      if (x >= lowest && x < highest) {
        const cell = ((x - lowest) * perUnit) | 0;
        let bin = starts[cell]!;
        if (crowded) bin = halve(edges, x, bin, ends[cell]!);
        while (x >= edges[bin + 1]!) bin++;
        into[i] = bin + 1;
      } else {
        into[i] = x < lowest ? 0 : x >= highest ? bins + 1 : -1;
      }
    }
  }
  return { places };
}

/** Halves `[lo, hi)`, which holds the bin of `x`, until few edges are left; returns its lower end. */
function halve(edges: Float64Array, x: number, lo: number, hi: number): number {
  while (hi - lo > FEW) {
    const middle = (lo + hi) >> 1;
    if (x >= edges[middle]!) lo = middle;
    else hi = middle;
  }
  return lo;
}

/**
 * For each grid cell the edges between which its values are searched: `starts[c]` the last edge of an earlier cell,
 * `ends[c]` the first edge of a later one. A value's cell is a rounded product, but rounding is monotone: a value of
 * cell `c` stands above every edge of an earlier cell and below every edge of a later one, without exception.
 */
function searchGrid(edges: Float64Array, perUnit: number, cells: number): { starts: Int32Array; ends: Int32Array } {
  const cellOf = (edge: number): number => ((edge - edges[0]!) * perUnit) | 0;
  const bins = edges.length - 1;
  const starts = new Int32Array(cells + 1);
  const ends = new Int32Array(cells + 1).fill(bins);
  let before = 0;
  let after = 0;
  for (let c = 0; c <= cells; c++) {
    while (before < bins && cellOf(edges[before + 1]!) < c) before++;
    while (after < bins && cellOf(edges[after]!) <= c) after++;
    starts[c] = before;
    ends[c] = after;
  }
  return { starts, ends };
}
