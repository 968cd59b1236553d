import { normalQuantile } from '../numerics/normal';
import { PURPOSE, streamOf } from '../numerics/random';
import { columnOf, hasNoPosterior, type Posterior } from '../posterior/posterior';
import { InputError } from '../study/input-error';
import { shapeOf, type Cells, type Tally } from '../tally/tally';
import { outcomePlaces, type AuditInput } from './audit-input';
import { DRAWS, intervalOfDraws } from './draws';
import { cellMoments, fold, whyNotFolded } from './folding';
import { groupTableOf } from './group-table';
import { EXCEEDANCES, falseDiscoveryAdjusted, homogeneityOf, type GroupTable, type Homogeneity } from './homogeneity';
import { BLOCK, type MatrixSampler } from './matrix-draws';
import { listMeasure, type Measure, type Reading } from './measure';
import type { ReferenceSpectrum } from './reference';

/** One column of two campaigns: how far its outcome probabilities are apart. */
export interface ColumnComparison {
  column: string;
  /**
   * Total-variation distance between the two posterior means, with its interval over the outcomes where the first stands
   * above the second; 0 at its lower end where noise alone could bring it about.
   */
  distance: number;
  lower: number;
  upper: number;
  /** What the distance comes to on average where both are alike: the part of it that is noise. */
  expectedDistance: number;
  /** Likelihood-ratio test of homogeneity, and its p-value adjusted for all columns (Benjamini-Hochberg). */
  gSquared: number;
  freedom: number;
  pValue: number;
  adjusted: number;
  /** The outcome whose difference is largest in units of its own posterior sd. */
  outcome: string;
}

/** The second campaign against the first. */
export interface Comparison {
  /** In the order of the columns; the reason where a column cannot be compared. */
  columns: (ColumnComparison | { reason: string })[];
  /** `[columns, outcomes]`: second minus first posterior mean and the interval of the difference; 0 in columns without a comparison. */
  differences: { value: Float64Array; lower: Float64Array; upper: Float64Array };
  /** Folded reference spectrum in each reconstructed bin: of the first, of the second, and second minus first. */
  folded: { first: Measure; second: Measure; change: Measure };
  reference: string;
}

/**
 * Compares two tallies of the same axes (statistics.md 6): per column the differences with intervals from independent replicas, distance,
 * and homogeneity; and what changes in the folded reference spectrum, with the matrix's own uncertainty of both (normal intervals).
 * Throws `InputError` naming the second as `where` if columns, outcomes or the recording of losses differ.
 */
export function compareTallies(
  first: AuditInput,
  second: AuditInput,
  reference: ReferenceSpectrum,
  sampler: MatrixSampler,
  where = 'second tally',
): Comparison {
  requireSameAxes(first.tally, second.tally, where);
  const { columns, outcomes } = shapeOf(first.tally);
  const differences = differencesOf(first, second, sampler);
  const together = bothCells(first.tally.cells, second.tally.cells);
  const most = Math.max(LEAST_TABLES, Math.ceil((2 * columns) / FALSE_DISCOVERIES));
  const found = first.tally.columnNames.map((column, j) => {
    const table = groupTableOf(together, { groups: 2, columns, outcomes }, j);
    const stream = streamOf(first.study.ensemble.seed, PURPOSE.compare, j, 0);
    const test = homogeneityOf(table, stream, { exceedances: EXCEEDANCES, most });
    const spread = differences.columns[j];
    if (!test || !spread) return { reason: 'one of the two has no events here' };
    return comparisonOf(column, table, test, spread, first);
  });
  const tested = found.filter((comparison) => 'pValue' in comparison);
  falseDiscoveryAdjusted(tested.map(({ pValue }) => pValue)).forEach((p, i) => (tested[i]!.adjusted = p));
  return {
    columns: found,
    differences: differences.cells,
    folded: foldedOf(first, second, reference),
    reference: reference.description,
  };
}

/** The rate at which adjusted p-values are meant to be read; it sets how finely they are drawn. */
export const FALSE_DISCOVERIES = 0.05;

/** Tables drawn at the least, so that a p-value of few columns is told finely enough. */
const LEAST_TABLES = 4000;

function requireSameAxes(first: Tally, second: Tally, where: string): void {
  for (const [what, a, b] of [
    ['columns', first.columnNames, second.columnNames],
    ['outcomes', first.outcomeNames, second.outcomeNames],
  ] as const) {
    if (a.length !== b.length)
      throw new InputError(where, `${b.length} ${what} against ${a.length}`, 'compare tallies of the same axes');
    const i = a.findIndex((name, k) => name !== b[k]);
    if (i >= 0) throw new InputError(where, `${what}: "${b[i]}" against "${a[i]}"`, 'compare tallies of the same axes');
  }
}

/** `[2, columns, outcomes]`; unit weights where only one of the two has weights. */
function bothCells(first: Cells, second: Cells): Cells {
  const both = (a: Float64Array, b: Float64Array): Float64Array => Float64Array.from([...a, ...b]);
  const events = both(first.events, second.events);
  if (!first.weights && !second.weights) return { events, weights: null, squares: null };
  return {
    events,
    weights: both(first.weights ?? first.events, second.weights ?? second.events),
    squares: both(first.squares ?? first.events, second.squares ?? second.events),
  };
}

/** Draws of the difference of one column, `[DRAWS, outcomes]`, and its mean and sd, `[outcomes]`. */
interface ColumnSpread {
  draws: Float64Array;
  mean: Float64Array;
  sd: Float64Array;
}

function differencesOf(first: AuditInput, second: AuditInput, sampler: MatrixSampler) {
  const { columns, outcomes } = shapeOf(first.tally);
  const { credibility, ensemble } = first.study;
  const means = [cellMoments(first.posterior), cellMoments(second.posterior)] as const;
  const cells = {
    value: new Float64Array(columns * outcomes),
    lower: new Float64Array(columns * outcomes),
    upper: new Float64Array(columns * outcomes),
  };
  const spreads: (ColumnSpread | null)[] = [];
  for (let j = 0; j < columns; j++) {
    spreads[j] = null;
    if (hasNoPosterior(first.posterior, j) || hasNoPosterior(second.posterior, j)) continue;
    // The two must not share random numbers; neighbouring seeds give independent streams.
    const draws = columnDraws(second.posterior, j, sampler, (ensemble.seed + 1) % Number.MAX_SAFE_INTEGER);
    columnDraws(first.posterior, j, sampler, ensemble.seed).forEach((p, i) => (draws[i]! -= p));
    const mean = new Float64Array(outcomes);
    const sd = new Float64Array(outcomes);
    for (let k = 0; k < outcomes; k++) {
      const at = j * outcomes + k;
      mean[k] = means[1].mean[at]! - means[0].mean[at]!;
      sd[k] = Math.sqrt(means[0].variance[at]! + means[1].variance[at]!);
      const own = Float64Array.from({ length: DRAWS }, (_, r) => draws[r * outcomes + k]!);
      const interval = intervalOfDraws(own, credibility);
      cells.value[at] = mean[k]!;
      cells.lower[at] = interval.lower;
      cells.upper[at] = interval.upper;
    }
    spreads[j] = { draws, mean, sd };
  }
  return { cells, columns: spreads };
}

function columnDraws(posterior: Posterior, j: number, sampler: MatrixSampler, seed: number): Float64Array {
  const { outcomes } = posterior;
  const draw = sampler({ columns: 1, outcomes, ...columnOf(posterior, j) }, seed);
  const draws = new Float64Array(DRAWS * outcomes);
  for (let from = 0; from < DRAWS; from += BLOCK) {
    const count = Math.min(BLOCK, DRAWS - from);
    draw(from / BLOCK, count, draws.subarray(from * outcomes, (from + count) * outcomes));
  }
  return draws;
}

function comparisonOf(
  column: string,
  { contents, outcomes }: GroupTable,
  test: Homogeneity,
  { draws, mean, sd }: ColumnSpread,
  { study, tally }: AuditInput,
): ColumnComparison {
  const total = (g: number): number => contents.subarray(g * outcomes, (g + 1) * outcomes).reduce((a, b) => a + b, 0);
  const [a, b] = [total(0), total(1)];
  // Outcomes from which the second campaign has moved away: fixed by the means, so that noise of either sign averages out.
  const left = Float64Array.from({ length: DRAWS }, (_, r) =>
    mean.reduce((sum, m, k) => (m < 0 ? sum - draws[r * outcomes + k]! : sum), 0),
  );
  const interval = intervalOfDraws(left, study.credibility);
  const deviates = mean.map((m, k) => (sd[k]! > 0 ? Math.abs(m) / sd[k]! : 0));
  return {
    column,
    distance: mean.reduce((sum, m) => sum + Math.abs(m), 0) / 2,
    lower: Math.max(0, interval.lower),
    upper: interval.upper,
    // A group's distance from the pool is the other's share of the whole times the distance between the two.
    expectedDistance: (test.expectedDistance * (a + b)) / Math.max(a, b),
    gSquared: test.gSquared,
    freedom: test.freedom,
    pValue: test.pValue,
    adjusted: 1,
    outcome: tally.outcomeNames[deviates.indexOf(Math.max(...deviates))]!,
  };
}

function foldedOf(first: AuditInput, second: AuditInput, reference: ReferenceSpectrum): Comparison['folded'] {
  const reason = whyNotFolded(first, reference) ?? whyNotFolded(second, reference);
  if (reason !== null) {
    const none = { value: null, reason } as const;
    return { first: none, second: none, change: none };
  }
  const { window } = outcomePlaces(first);
  const bins = window.map((k) => first.tally.outcomeNames[k]!);
  const squares = reference.contents.map((s) => s * s);
  const [before, after] = [first, second].map(({ posterior }) => {
    const { mean, variance } = cellMoments(posterior);
    return { folded: fold(reference.contents, mean, window), variance: fold(squares, variance, window) };
  }) as [Folded, Folded];
  const reach = normalQuantile((1 + first.study.credibility) / 2);
  const list = (value: (i: number) => number, variance: (i: number) => number): Measure =>
    listMeasure(
      bins,
      bins.map((_, i): Reading => {
        const half = reach * Math.sqrt(variance(i));
        return { value: value(i), lower: value(i) - half, upper: value(i) + half };
      }),
    );
  return {
    first: list(
      (i) => before.folded[i]!,
      (i) => before.variance[i]!,
    ),
    second: list(
      (i) => after.folded[i]!,
      (i) => after.variance[i]!,
    ),
    change: list(
      (i) => after.folded[i]! - before.folded[i]!,
      (i) => before.variance[i]! + after.variance[i]!,
    ),
  };
}

interface Folded {
  folded: Float64Array;
  variance: Float64Array;
}
