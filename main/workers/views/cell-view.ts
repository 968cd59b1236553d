import { betaCdf, betaQuantile, betaQuantileUpper } from '../../../src/numerics/beta';
import { cellInterval } from '../../../src/posterior/intervals';
import { marginalOf, type Marginal } from '../../../src/posterior/marginal';
import { hasNoPosterior } from '../../../src/posterior/posterior';
import { InputError } from '../../../src/study/input-error';
import type { CellView } from '../../bridge';
import type { Analysis } from '../analysis';

/** Steps of the density's grid: a curve of that many pixels needs no more. */
const STEPS = 300;
/** Probability left out at each side of the grid. */
const LEFT_OUT = 1e-4;

/** One cell with the density of its marginal. Throws `InputError` where the column has no posterior. */
export function cellView(analysis: Analysis, column: number, outcome: number): CellView {
  const { posterior, prior, tally, study } = analysis;
  checkPlace(analysis, column, outcome);
  const at = column * posterior.outcomes + outcome;
  const marginal = marginalOf(posterior, column, [outcome]);
  const events = tally.cells.events[at]!;
  const { mean, sd } = analysis.summary();
  const ends = (kind: 'equal-tailed' | 'shortest'): [number, number] => {
    const { lower, upper } = cellInterval(marginal, events, study.credibility, kind);
    return [lower, upper];
  };
  const priorOnly = prior.counts.subarray(column * posterior.outcomes, (column + 1) * posterior.outcomes);
  const { edges, x } = gridOf(marginal);
  return {
    column,
    outcome,
    events,
    weight: tally.cells.weights?.[at] ?? null,
    prior: prior.counts[at]!,
    mean: mean[at]!,
    sd: sd[at]!,
    equalTailed: ends('equal-tailed'),
    shortest: ends('shortest'),
    ...marginal,
    x,
    density: densityOn(edges, marginal),
    priorDensity: densityOn(edges, priorMarginal(priorOnly, outcome)),
  };
}

/** Throws `InputError` for a place outside the matrix, or in a column without posterior. */
export function checkPlace({ posterior, tally }: Analysis, column: number, outcome = 0): void {
  if (column >= posterior.columns || outcome >= posterior.outcomes) {
    throw new InputError('matrix', `no cell ${column}, ${outcome}`, 'choose a cell of the matrix');
  }
  if (hasNoPosterior(posterior, column)) {
    throw new InputError(
      `column ${tally.columnNames[column]}`,
      'no events and a prior of zero',
      'give it a pseudo-count',
    );
  }
}

function priorMarginal(counts: Float64Array, outcome: number): Marginal {
  const a = counts[outcome]!;
  return { a, b: counts.reduce((sum, count) => sum + count, 0) - a, method: 'exact' };
}

/** Steps over all but `LEFT_OUT` of the probability at each side, and their middles. */
function gridOf({ a, b }: Marginal): { edges: Float64Array; x: Float64Array } {
  const certain = a === 0 || b === 0;
  const from = certain ? 0 : betaQuantile(LEFT_OUT, a, b);
  const to = certain ? 1 : betaQuantileUpper(LEFT_OUT, a, b);
  const edges = Float64Array.from({ length: STEPS + 1 }, (_, i) => from + ((to - from) * i) / STEPS);
  return { edges, x: Float64Array.from({ length: STEPS }, (_, i) => (edges[i]! + edges[i + 1]!) / 2) };
}

/** Mean density in each step, from the distribution function: finite and right even where the density is not. */
function densityOn(edges: Float64Array, { a, b }: Marginal): Float64Array {
  if (a === 0 || b === 0) return new Float64Array(STEPS);
  const passed = edges.map((edge) => betaCdf(edge, a, b));
  return Float64Array.from({ length: STEPS }, (_, i) => (passed[i + 1]! - passed[i]!) / (edges[i + 1]! - edges[i]!));
}
