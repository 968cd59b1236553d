import { normalCdf, normalQuantile } from '../numerics/normal';
import { linearMoments } from '../posterior/share-moments';
import { binRange, type NumericAxis } from '../study/axis';
import { unitOf, type AuditInput } from './audit-input';
import type { Findings } from './findings';
import { answer, type Flag, type FlagState } from './flag';
import { growthAdvice } from './growth-advice';
import { binCentres, NOTHING_IN_WINDOW, windowResponse } from './window-response';
import { formatInterval } from './wording';

/**
 * The flag `non-monotone`: whether the mean reconstructed value (of bin centres, over the window) of a bin lies below that
 * of the bin before it. The value is the step up from that one, its limit 0. Means and variances are exact and columns
 * independent; interval and probability are normal. Tags have no order, and the first bin none before it: no flag.
 */
export function auditNonMonotone(input: AuditInput): Findings {
  const { trueAxis, recoAxis } = input;
  if (trueAxis.kind === 'tags' || recoAxis.kind === 'tags' || recoAxis.edges.length === 2) return { flags: [] };
  const { first, end } = binRange(trueAxis);
  const centres = binCentres(recoAxis);
  const means = Array.from({ length: end - first }, (_, i) => meanReconstructed(input, first + i, centres));
  const flags = means.slice(1).map((mean, i) => stepFlag(input, recoAxis, first + i + 1, means[i]!, mean));
  return { flags };
}

interface MeanReconstructed {
  mean: number;
  variance: number;
  events: number;
}

function meanReconstructed(input: AuditInput, j: number, centres: Float64Array): MeanReconstructed | null {
  const response = windowResponse(input, j);
  if (!response) return null;
  return { ...linearMoments(response.shape, response.scale, centres), events: response.events };
}

function stepFlag(
  input: AuditInput,
  recoAxis: NumericAxis,
  j: number,
  before: MeanReconstructed | null,
  here: MeanReconstructed | null,
): Flag {
  const place = { id: 'non-monotone' as const, column: input.tally.columnNames[j]!, bin: null, limit: 0 };
  if (!before || !here) {
    const unknown = { value: null, lower: null, upper: null, probability: null, state: 'undecided' as const };
    const which = here ? 'the column before it has ' : '';
    return {
      ...place,
      ...unknown,
      evidence: which + NOTHING_IN_WINDOW,
      advice: 'add events to that column, or merge it',
    };
  }
  const value = here.mean - before.mean;
  const sd = Math.sqrt(here.variance + before.variance);
  const reach = sd * normalQuantile((1 + input.study.credibility) / 2);
  const probability = sd > 0 ? normalCdf(-value / sd) : Number(value < 0);
  const state = answer(probability, input.study.credibility);
  const [lower, upper] = [value - reach, value + reach];
  const evidence = `mean reconstructed value ${formatInterval(value, lower, upper)}${unitOf(recoAxis)} above that of the column before it`;
  const advice = adviceOf(input, state, { value, sd, limit: 0, counted: before.events + here.events });
  return { ...place, value, lower, upper, probability, state, evidence, advice };
}

function adviceOf(
  input: AuditInput,
  state: FlagState,
  step: { value: number; sd: number; limit: number; counted: number },
): string {
  if (state === 'clear') return '';
  if (state === 'flagged')
    return 'the response turns back here: two true values look alike, and no unfolding can tell them apart';
  return growthAdvice(input, step);
}
