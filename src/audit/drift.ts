import { PURPOSE, streamOf } from '../numerics/random';
import type { Marginal } from '../posterior/marginal';
import type { Posterior } from '../posterior/posterior';
import type { Study } from '../study/study';
import { shapeOf } from '../tally/tally';
import type { AuditInput } from './audit-input';
import { betaVariate, DRAWS, intervalOfDraws } from './draws';
import type { Flag } from './flag';
import { groupTableOf } from './group-table';
import { EXCEEDANCES, falseDiscoveryAdjusted, homogeneityOf, type GroupTable, type Homogeneity } from './homogeneity';
import { listMeasure, type Measure, type Reading } from './measure';
import { formatInterval, formatNumber } from './wording';

/** Run drift of one column. */
export interface ColumnDrift extends Homogeneity {
  column: string;
  /** Benjamini-Hochberg adjusted p-value over the columns. */
  adjusted: number;
  /** Label of the run that stands furthest from the pool. */
  run: string;
  /**
   * Interval of that run's distance: over the outcomes where the run stands above the pool. They were chosen on the same
   * events, so the distance of a thin run is high by about `expectedDistance`.
   */
  lower: number;
  upper: number;
  /** A shift of one run (total-variation distance) below this can pass unseen: half of such would not reach 5 %. */
  detectable: number;
  /** Total-variation distance of each run from the pool, in the order of the labels; `null` for a run without events here. */
  distances: (number | null)[];
}

export interface Drift {
  /** Largest distance a column. */
  measure: Measure;
  runs: string[];
  /** In the order of the columns; `null` where fewer than two runs have events. */
  columns: (ColumnDrift | null)[];
  flags: Flag[];
}

/**
 * Whether the response changed from run to run: likelihood-ratio test of homogeneity with seeded bootstrap (one stream a
 * column), Benjamini-Hochberg over the columns, largest total-variation distance as the size. There is no posterior
 * probability of drift: a flag is `flagged` (both beyond their limits) or `clear`. Weighted columns are tested by scaled
 * Poisson variates with each outcome's own weight scale; their runs are pooled by effective entries.
 */
export function driftOf({ study, tally, posterior }: AuditInput): Drift {
  if (!tally.runs)
    return { measure: { value: null, reason: 'no run is read (roles.run)' }, runs: [], columns: [], flags: [] };
  const { labels, cells } = tally.runs;
  const { columns, outcomes } = shapeOf(tally);
  const shape = { groups: labels.length, columns, outcomes };
  // Twice the least number that lets a single drifted column pass Benjamini-Hochberg among all of them.
  const most = Math.ceil((2 * columns) / Math.max(study.limits['run-drift'], LEAST_RATE));
  const found = tally.columnNames.map((column, j) => {
    const table = groupTableOf(cells, shape, j);
    const stream = streamOf(study.ensemble.seed, PURPOSE.runDrift, j, 0);
    const test = homogeneityOf(table, stream, { exceedances: EXCEEDANCES, most });
    return (
      test && { ...test, ...placeOf(test, table, posterior, j, study), column, run: labels[test.group]!, adjusted: 1 }
    );
  });
  const tested = found.filter((drift) => drift !== null);
  falseDiscoveryAdjusted(tested.map(({ pValue }) => pValue)).forEach((adjusted, i) => (tested[i]!.adjusted = adjusted));
  const measure = listMeasure(tally.columnNames, found.map(readingOf));
  return { measure, runs: labels, columns: found, flags: tested.map((drift) => flagOf(drift, study)) };
}

/** A stated rate of 0 would ask for endless tables. */
const LEAST_RATE = 1e-3;

function readingOf(drift: ColumnDrift | null): Reading {
  if (!drift) return { reason: 'fewer than two runs have events here' };
  return { value: drift.distance, lower: drift.lower, upper: drift.upper };
}

/** Interval, detectable shift and the distance of every run. */
function placeOf(test: Homogeneity, table: GroupTable, posterior: Posterior, column: number, study: Study) {
  const { groups, outcomes, contents } = table;
  const row = (g: number): Float64Array => contents.subarray(g * outcomes, (g + 1) * outcomes);
  const sum = (values: Float64Array): number => values.reduce((a, b) => a + b, 0);
  const pool = new Float64Array(outcomes).map((_, k) =>
    [...Array(groups).keys()].reduce((all, g) => all + row(g)[k]!, 0),
  );
  const all = sum(pool);
  const distances = Array.from({ length: groups }, (_, g) => {
    const own = sum(row(g));
    return own > 0 ? row(g).reduce((shift, n, k) => shift + Math.abs(n / own - pool[k]! / all), 0) / 2 : null;
  });
  const prior = posterior.prior.subarray(column * outcomes, (column + 1) * outcomes);
  const interval = distanceInterval(row(test.group), pool, prior, column, study);
  const sizes = Array.from({ length: groups }, (_, g) => sum(row(g))).filter((n) => n > 0);
  return { ...interval, distances, detectable: detectableShift(sizes, test.freedom) };
}

/** Interval of `(1 - f) (P_run(S) - P_others(S))`, `S` where the run stands above the pool, `f` the run's share of it. */
function distanceInterval(
  run: Float64Array,
  pool: Float64Array,
  prior: Float64Array,
  column: number,
  study: Study,
): { lower: number; upper: number } {
  const all = pool.reduce((a, b) => a + b, 0);
  const share = run.reduce((a, b) => a + b, 0) / all;
  const mine: Marginal = { a: 0, b: 0, method: 'exact' };
  const others: Marginal = { a: 0, b: 0, method: 'exact' };
  run.forEach((n, k) => {
    const side = n > share * pool[k]! ? 'a' : 'b';
    mine[side] += n + share * prior[k]!;
    others[side] += Math.max(0, pool[k]! - n) + (1 - share) * prior[k]!;
  });
  const stream = streamOf(study.ensemble.seed, PURPOSE.runDrift, column, 1);
  const draws = new Float64Array(DRAWS);
  for (let i = 0; i < DRAWS; i++) {
    draws[i] = (1 - share) * Math.abs(betaVariate(stream, mine) - betaVariate(stream, others));
  }
  return intervalOfDraws(draws, study.credibility);
}

/** One-sided 5 % point of the standard normal. */
const FIVE_PERCENT = 1.6448536269514722;

/**
 * A shift `d` of a run of `n` of `N` events adds at least `4 d^2 n (1 - n/N)` to the mean of `G^2` (Cauchy-Schwarz on `sum
 * shift^2 / p`), which under homogeneity has mean `freedom` and variance near `2 freedom`. For the run of median size.
 */
function detectableShift(sizes: number[], freedom: number): number {
  const all = sizes.reduce((a, b) => a + b, 0);
  const size = sizes.sort((a, b) => a - b)[Math.floor(sizes.length / 2)]!;
  return Math.min(1, Math.sqrt((FIVE_PERCENT * Math.sqrt(2 * freedom)) / (4 * size * (1 - size / all))));
}

function flagOf(drift: ColumnDrift, study: Study): Flag {
  const rate = study.limits['run-drift'];
  const limit = study.limits['run-drift-distance'];
  const flagged = drift.adjusted <= rate && drift.distance > limit;
  const statistic = `G² = ${formatNumber(drift.gSquared, 4)} at ${drift.freedom} degrees of freedom`;
  const chance = `p = ${formatNumber(drift.pValue, 2)} (${formatNumber(drift.adjusted, 2)} adjusted for all columns)`;
  const size = `run "${drift.run}" is furthest from the pool, by ${formatInterval(drift.distance, drift.lower, drift.upper)} where chance alone gives ${formatNumber(drift.expectedDistance, 2)}`;
  const unseen = flagged ? '' : `; a shift of one run below ${formatNumber(drift.detectable, 2)} can pass unseen`;
  return {
    id: 'run-drift',
    column: drift.column,
    bin: null,
    state: flagged ? 'flagged' : 'clear',
    value: drift.distance,
    lower: drift.lower,
    upper: drift.upper,
    limit,
    probability: null,
    evidence: `${statistic}, ${chance}; ${size}${unseen}`,
    advice: flagged
      ? `look at run "${drift.run}" (gain, trigger, beam); leave it out, or build one matrix for each period`
      : '',
  };
}
