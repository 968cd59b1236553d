import { PURPOSE, streamOf } from '../numerics/random';
import { cellMarginals, momentsOf, type Marginal } from '../posterior/marginal';
import { columnOf, hasNoPosterior, posteriorOf, type Posterior } from '../posterior/posterior';
import { columnMoments } from '../posterior/share-moments';
import { rowSums } from '../tally/tally';
import { binRange } from '../study/axis';
import type { AuditInput } from './audit-input';
import { betaVariate, DRAWS, intervalOfDraws } from './draws';
import { answer, type Flag } from './flag';
import { listMeasure, type Measure, type Reading } from './measure';
import type { ReferenceSpectrum } from './reference';
import { formatInterval, formatNumber, formatPercent } from './wording';

/** Slope bias of one column: its cell with the largest one in units of that cell's own posterior sd. */
export interface ColumnSlope {
  column: string;
  /** Share of the lower half of the bin in the calibration, and in the reference spectrum. */
  calibration: number;
  reference: number;
  outcome: string;
  /** `|bias| / sd` with its interval. */
  ratio: number;
  lower: number;
  upper: number;
  /** `(reference - calibration) (p_low - p_up)` of that cell, what the reference spectrum would change. */
  bias: number;
  sd: number;
  /** Posterior probability that the ratio is above the limit. */
  probability: number;
}

export interface SlopeBias {
  measure: Measure;
  /** In the order of the columns; the reason where there is none. */
  columns: (ColumnSlope | { reason: string })[];
  flags: Flag[];
}

const ONE_SIDED = 'all events in one half of the bin: its slope cannot be seen';

/**
 * Whether a column depends on the shape of the calibration spectrum inside its bin (statistics.md 6). The halves' posteriors
 * take the column's prior in proportion to their share of the events, so that halves mixed as calibrated give the column's
 * own mean, and a thin half is not pulled towards the prior more than a full one. The measure is the one cell with the largest estimate:
 * the largest of all cells under the posterior would be made of noise, which stays at `2 |g - f|` sd however many events come.
 */
export function slopeBiasOf(input: AuditInput, reference: ReferenceSpectrum): SlopeBias {
  const { trueAxis, tally } = input;
  if (trueAxis.kind === 'tags') {
    return { measure: { value: null, reason: 'a tag has no halves' }, columns: [], flags: [] };
  }
  const halves = halfPosterior(input);
  const { first, end } = binRange(trueAxis);
  const columns = tally.columnNames.map((_, j) => {
    if (j < first || j >= end) return { reason: 'an outer column has no midpoint' };
    return slopeOf(input, reference, halves, j);
  });
  const flags = columns.flatMap((slope, j) => flagOf(input, tally.columnNames[j]!, slope));
  return { measure: listMeasure(tally.columnNames, columns.map(readingOf)), columns, flags };
}

interface Halves {
  /** `[2 columns, outcomes]`: lower half, upper half of each column. */
  posterior: Posterior;
  /** `[columns]`: share of the lower half; NaN in a column without events. */
  lowerShares: Float64Array;
}

function halfPosterior({ tally, posterior }: AuditInput): Halves {
  const { columns, outcomes } = posterior;
  const contents = rowSums(tally.halves.weights ?? tally.halves.events, outcomes).map((x) => Math.max(0, x));
  const lowerShares = new Float64Array(columns).map(
    (_, j) => contents[2 * j]! / (contents[2 * j]! + contents[2 * j + 1]!),
  );
  const counts = new Float64Array(2 * columns * outcomes).map((_, i) => {
    const j = Math.floor(i / (2 * outcomes));
    const share = Math.floor(i / outcomes) % 2 === 0 ? lowerShares[j]! : 1 - lowerShares[j]!;
    return (share || 0) * posterior.prior[j * outcomes + (i % outcomes)]!;
  });
  return { posterior: posteriorOf(tally.halves, { columns: 2 * columns, outcomes, counts }), lowerShares };
}

function slopeOf(
  input: AuditInput,
  reference: ReferenceSpectrum,
  halves: Halves,
  j: number,
): ColumnSlope | { reason: string } {
  const calibration = halves.lowerShares[j]!;
  if (Number.isNaN(calibration)) return { reason: 'no events' };
  if (!(reference.contents[j]! > 0)) return { reason: 'the reference spectrum has no content here' };
  const lean = reference.lowerShares[j]! - calibration;
  if (hasNoPosterior(halves.posterior, 2 * j) || hasNoPosterior(halves.posterior, 2 * j + 1)) {
    if (lean !== 0) return { reason: ONE_SIDED };
  }
  const cell = lean === 0 ? null : largestCell(input.posterior, halves.posterior, lean, j);
  const { ratio, bias, sd } = cell ?? { ratio: 0, bias: 0, sd: 0 };
  return {
    column: input.tally.columnNames[j]!,
    calibration,
    reference: reference.lowerShares[j]!,
    outcome: input.tally.outcomeNames[cell?.outcome ?? 0]!,
    ratio,
    bias,
    sd,
    ...(cell ? spreadOf(input, cell, lean, j) : { lower: 0, upper: 0, probability: 0 }),
  };
}

interface Cell {
  outcome: number;
  ratio: number;
  bias: number;
  sd: number;
  low: Marginal;
  up: Marginal;
}

function largestCell(posterior: Posterior, halves: Posterior, lean: number, j: number): Cell | null {
  const { shape, scale } = columnOf(posterior, j);
  const { variance } = columnMoments(shape, scale);
  const lows = cellMarginals(halves, 2 * j);
  const ups = cellMarginals(halves, 2 * j + 1);
  let best: Cell | null = null;
  for (let k = 0; k < posterior.outcomes; k++) {
    const [low, up] = [lows[k]!, ups[k]!];
    const bias = lean * (momentsOf(low).mean - momentsOf(up).mean);
    const sd = Math.sqrt(variance[k]!);
    const ratio = sd > 0 ? Math.abs(bias) / sd : 0;
    if (ratio > (best?.ratio ?? 0)) best = { outcome: k, ratio, bias, sd, low, up };
  }
  return best;
}

function spreadOf({ study }: AuditInput, { low, up, sd }: Cell, lean: number, j: number) {
  const stream = streamOf(study.ensemble.seed, PURPOSE.slopeBias, j, 0);
  const draws = new Float64Array(DRAWS);
  for (let i = 0; i < DRAWS; i++) draws[i] = Math.abs(lean * (betaVariate(stream, low) - betaVariate(stream, up))) / sd;
  const beyond = draws.filter((ratio) => ratio > study.limits['slope-bias']).length;
  return { ...intervalOfDraws(draws, study.credibility), probability: beyond / DRAWS };
}

function readingOf(slope: ColumnSlope | { reason: string }): Reading {
  return 'reason' in slope ? slope : { value: slope.ratio, lower: slope.lower, upper: slope.upper };
}

function flagOf({ study }: AuditInput, column: string, slope: ColumnSlope | { reason: string }): Flag[] {
  const place = { id: 'slope-bias' as const, column, bin: null, limit: study.limits['slope-bias'] };
  if ('reason' in slope) {
    if (slope.reason !== ONE_SIDED) return [];
    const unknown = { value: null, lower: null, upper: null, probability: null, state: 'undecided' as const };
    return [{ ...place, ...unknown, evidence: ONE_SIDED, advice: 'calibrate both halves of this bin' }];
  }
  const { ratio: value, lower, upper, probability, calibration, reference } = slope;
  const state = answer(probability, study.credibility);
  const shares = `lower half of the bin: ${formatPercent(calibration)} of the calibration, ${formatPercent(reference)} of the reference spectrum`;
  const size = `P(${slope.outcome}) would change by ${formatNumber(slope.bias, 2)}, ${formatInterval(value, lower, upper)} times its sd`;
  const advice = 'use narrower bins here, or calibrate with a spectrum whose slope is nearer to the reference spectrum';
  return [
    {
      ...place,
      value,
      lower,
      upper,
      probability,
      state,
      evidence: value === 0 ? shares : `${shares}; ${size}`,
      advice: state === 'clear' ? '' : advice,
    },
  ];
}
