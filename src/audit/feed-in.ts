import { binRange } from '../study/axis';
import { outcomePlaces, type AuditInput } from './audit-input';
import { intervalOfDraws } from './draws';
import { answer, type Flag, type FlagState } from './flag';
import { growthAdvice } from './growth-advice';
import { cellMoments, fold, whyNotFolded } from './folding';
import type { MatrixWatcher } from './matrix-draws';
import { listMeasure, type Measure, type Reading } from './measure';
import type { ReferenceSpectrum } from './reference';
import { formatShare } from './wording';

export interface FeedIn {
  /** Share of each reconstructed bin's expected content that was generated outside the true window. */
  measure: Measure;
  /** `[bins]`: posterior probability that it is above the limit; empty where the measure is absent. */
  probabilities: number[];
  flags: Flag[];
}

export interface FeedInWatcher extends MatrixWatcher {
  result(): FeedIn;
}

/**
 * Feed-in of every reconstructed bin under the reference spectrum (statistics.md 6): the value from the mean matrix, interval
 * and probability from the replicas watched. Absent on a true axis of tags, which has no outside.
 */
export function feedInWatcher(input: AuditInput, reference: ReferenceSpectrum, replicas: number): FeedInWatcher {
  const reason = input.trueAxis.kind === 'tags' ? 'a true axis of tags has no outside' : whyNotFolded(input, reference);
  if (reason !== null) {
    return {
      watch: () => undefined,
      result: () => ({ measure: { value: null, reason }, probabilities: [], flags: [] }),
    };
  }
  const { window } = outcomePlaces(input);
  const share = shareOfOutside(input, reference, window);
  const draws = window.map(() => new Float64Array(replicas));
  let watched = 0;
  return {
    watch: (matrix) => {
      share(matrix).forEach((value, i) => (draws[i]![watched] = value));
      watched++;
    },
    result: () => feedInOf(input, share(cellMoments(input.posterior).mean), draws),
  };
}

/** Share from outside in each bin; NaN in a bin without content. */
function shareOfOutside(input: AuditInput, { contents }: ReferenceSpectrum, window: number[]) {
  const { first, end } = binRange(input.trueAxis);
  return (matrix: Float64Array): Float64Array => {
    const all = fold(contents, matrix, window);
    const outside = fold(contents, matrix, window, (j) => j < first || j >= end);
    return outside.map((content, i) => (all[i]! > 0 ? content / all[i]! : NaN));
  };
}

function feedInOf(input: AuditInput, values: Float64Array, draws: Float64Array[]): FeedIn {
  const { study, tally } = input;
  const limit = study.limits['feed-in'];
  const bins = outcomePlaces(input).window.map((k) => tally.outcomeNames[k]!);
  const probabilities: number[] = [];
  const flags: Flag[] = [];
  const readings = [...values].map((value, i): Reading => {
    if (Number.isNaN(value)) return { reason: 'the reference spectrum gives this bin nothing' };
    const known = draws[i]!.filter((draw) => !Number.isNaN(draw));
    const probability = known.filter((draw) => draw > limit).length / known.length;
    const interval = intervalOfDraws(known, study.credibility);
    probabilities[i] = probability;
    const state = answer(probability, study.credibility);
    const evidence = `${formatShare(value, interval.lower, interval.upper)} of the expected content was generated outside the true window`;
    const advice = adviceOf(input, state, value, spreadOf(known), limit);
    flags.push({
      id: 'feed-in',
      column: null,
      bin: bins[i]!,
      state,
      value,
      ...interval,
      limit,
      probability,
      evidence,
      advice,
    });
    return { value, ...interval };
  });
  return { measure: listMeasure(bins, readings), probabilities, flags };
}

function adviceOf(input: AuditInput, state: FlagState, value: number, sd: number, limit: number): string {
  if (state === 'clear') return '';
  if (state === 'flagged') return 'widen the true axis, or leave this reconstructed bin out of the unfolding';
  const counted = input.tally.cells.events.reduce((a, b) => a + b, 0);
  return growthAdvice(input, { value, sd, limit, counted });
}

function spreadOf(draws: Float64Array): number {
  const mean = draws.reduce((a, b) => a + b, 0) / draws.length;
  return Math.sqrt(draws.reduce((sum, x) => sum + (x - mean) ** 2, 0) / (draws.length - 1));
}
