import gammaln from '@stdlib/math-base-special-gammaln';
import { binRange, midpoint, type Axis } from '../study/axis';
import { shapeOf, type Cells, type Tally } from '../tally/tally';
import { effectiveEntries } from './posterior';
import { shiftContent } from './shift-content';

/** The neighbour prior and how its strength was found (statistics.md 3). */
export interface NeighbourPrior {
  /** Pseudo-counts, `[columns, outcomes]`. */
  counts: Float64Array;
  /** `[columns]`: strength `kappa` of each column's prior; 0 where Jeffreys stands in, see `neighbourPrior`. */
  strengths: Float64Array;
  /** Strengths tried, increasing, and the log evidence of all columns together at each; all 0 if none has neighbours. */
  grid: Float64Array;
  logEvidence: Float64Array;
  /** Where that curve is highest; `null` where no column has neighbours. */
  strength: number | null;
}

/** Part of the prior's mean that is even over the outcomes, so that none is taken to be impossible. */
const EVEN_PART = 0.05;
/** The strengths tried: a tenth of an event to a million, eight a decade. An end is taken where the curve still rises. */
const DECADES = { from: -1, to: 6, steps: 8 };
/** Pseudo-count of a column that no neighbour informs. */
const JEFFREYS = 0.5;

/**
 * The prior of each true bin from the bins next to it: their contents, shifted by the distance of the bin centres,
 * pooled, mixed with 5 % even, times a strength `kappa` at the maximum of the summed Dirichlet-multinomial log evidence
 * (Minka, Estimating a Dirichlet distribution, 2000, from memory). A column never informs its own prior: the evidence for
 * its strength leaves out itself and the columns whose prior it enters. Weighted columns count as `n_eff` events.
 *
 * Shifts are in the reconstructed axis's coordinate, `ln` on a log axis; none where the axes differ in unit or one has
 * tags. `below`, `above`, tags, and bins whose neighbours are empty or leave no evidence take Jeffreys's 1/2 an outcome.
 */
export function neighbourPrior(tally: Tally, trueAxis: Axis, recoAxis: Axis): NeighbourPrior {
  const { columns, outcomes } = shapeOf(tally);
  const contents = effectiveContents(tally.cells, columns, outcomes);
  const neighbours = Array.from({ length: columns }, (_, j) => informants(j, trueAxis, contents));
  const means = neighbours.map((list, j) => priorMean(list, j, contents, trueAxis, recoAxis));
  const grid = strengthGrid();
  const curves = means.map((mean, j) => mean && evidenceCurve(contents[j]!, mean, grid));
  const counts = new Float64Array(columns * outcomes).fill(JEFFREYS);
  const strengths = means.map((mean, j) => {
    const others = curves.filter((_, i) => i !== j && !neighbours[i]!.includes(j));
    return (mean && highest(grid, summed(others, grid.length))) ?? 0;
  });
  strengths.forEach((strength, j) => {
    if (strength > 0)
      counts.set(
        means[j]!.map((m) => strength * m),
        j * outcomes,
      );
  });
  const logEvidence = summed(curves, grid.length);
  return { counts, strengths: Float64Array.from(strengths), grid, logEvidence, strength: highest(grid, logEvidence) };
}

/** Contents of each column as effective events, `W_k` clamped at 0 and scaled to `n_eff` in all. */
function effectiveContents(cells: Cells, columns: number, outcomes: number): Float64Array[] {
  const effective = effectiveEntries(cells, outcomes);
  return Array.from({ length: columns }, (_, j) => {
    const content = (cells.weights ?? cells.events).slice(j * outcomes, (j + 1) * outcomes).map((w) => Math.max(0, w));
    const total = content.reduce((sum, w) => sum + w, 0);
    return content.map((w) => (total > 0 ? (w / total) * effective[j]! : 0));
  });
}

/** The bins beside bin `j` that hold events. */
function informants(j: number, axis: Axis, contents: Float64Array[]): number[] {
  const { first, end } = binRange(axis);
  if (axis.kind === 'tags' || j < first || j >= end) return [];
  return [j - 1, j + 1].filter((i) => i >= first && i < end && contents[i]!.some((n) => n > 0));
}

function priorMean(
  neighbours: number[],
  j: number,
  contents: Float64Array[],
  trueAxis: Axis,
  recoAxis: Axis,
): Float64Array | null {
  if (neighbours.length === 0) return null;
  const pooled = new Float64Array(contents[j]!.length);
  for (const i of neighbours) {
    shiftContent(contents[i]!, recoAxis, distanceOf(i, j, trueAxis, recoAxis)).forEach((n, k) => (pooled[k]! += n));
  }
  const total = pooled.reduce((sum, n) => sum + n, 0);
  return pooled.map((n) => (1 - EVEN_PART) * (n / total) + EVEN_PART / pooled.length);
}

/** From the centre of true bin `i` to that of `j`, in the coordinate of the reconstructed axis. */
function distanceOf(i: number, j: number, trueAxis: Axis, recoAxis: Axis): number {
  if (trueAxis.kind === 'tags' || recoAxis.kind === 'tags' || trueAxis.unit !== recoAxis.unit) return 0;
  const { first } = binRange(trueAxis);
  const [from, to] = [midpoint(trueAxis, i - first), midpoint(trueAxis, j - first)];
  if (recoAxis.spacing === 'linear') return to - from;
  // A centre at or below zero has no place on a log axis: such a column informs its neighbour unshifted.
  return from > 0 && to > 0 ? Math.log(to / from) : 0;
}

function strengthGrid(): Float64Array {
  const length = (DECADES.to - DECADES.from) * DECADES.steps + 1;
  return Float64Array.from({ length }, (_, i) => 10 ** (DECADES.from + i / DECADES.steps));
}

/** Log evidence of one column's content under `Dirichlet(kappa mean)`, at each `kappa`, without the multinomial factor. */
function evidenceCurve(content: Float64Array, mean: Float64Array, grid: Float64Array): Float64Array {
  const seen = [...content.keys()].filter((k) => content[k]! > 0);
  const total = content.reduce((sum, n) => sum + n, 0);
  return grid.map((kappa) => {
    let sum = gammaln(kappa) - gammaln(total + kappa);
    for (const k of seen) sum += gammaln(content[k]! + kappa * mean[k]!) - gammaln(kappa * mean[k]!);
    return sum;
  });
}

function summed(curves: (Float64Array | null)[], length: number): Float64Array {
  const sum = new Float64Array(length);
  for (const curve of curves) curve?.forEach((value, i) => (sum[i]! += value));
  return sum;
}

/**
 * Where a curve is highest, by the parabola through its three highest points in `ln kappa`, good to a part in a hundred;
 * `null` for a curve of no evidence, which is 0 throughout.
 */
function highest(grid: Float64Array, curve: Float64Array): number | null {
  if (curve.every((value) => value === 0)) return null;
  const top = curve.indexOf(Math.max(...curve));
  if (top === 0 || top === grid.length - 1) return grid[top]!;
  const [before, at, after] = [curve[top - 1]!, curve[top]!, curve[top + 1]!];
  const offset = (before - after) / (2 * (before - 2 * at + after));
  return grid[top]! * (grid[top + 1]! / grid[top]!) ** offset;
}
