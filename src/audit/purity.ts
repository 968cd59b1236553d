import { axesMatch, binRange } from '../study/axis';
import type { AuditInput } from './audit-input';
import type { Findings } from './findings';
import { answer, type Flag, type FlagState } from './flag';
import { cellMoments, whyNotFolded } from './folding';
import { growthAdvice } from './growth-advice';
import { listMeasure, type Reading } from './measure';
import type { ReferenceSpectrum } from './reference';
import { contentRatio, ratioBelow, ratioInterval, type ContentRatio } from './ratio-of-contents';
import { NO_MATCHING_BINS, OUTER_COLUMN } from './stability';
import { formatShare } from './wording';

const NO_CONTENT = 'the reference spectrum gives this bin nothing';

/**
 * Purity of every reconstructed bin, listed under the column it matches: the share of its content, under the reference
 * spectrum, that was generated in the matching true bin (the usual HEP definition, common practice), and the flag
 * `impure`. Needs equal axes.
 *
 * `X / (X + Y)` with `X = s_k p_kk` and `Y` the content from elsewhere, which are independent. The value is that of the
 * mean matrix; interval and probability take `X` and `Y` as gamma variates of their exact means and variances: ends within a
 * fifth of the half-width even where a column of five events adds to the bin, a tenth and better elsewhere.
 */
export function auditPurity(input: AuditInput, reference: ReferenceSpectrum): Findings {
  const { trueAxis, recoAxis, tally } = input;
  const reason = axesMatch(trueAxis, recoAxis) ? whyNotFolded(input, reference) : NO_MATCHING_BINS;
  if (reason !== null) return { columns: { purity: { value: null, reason } }, flags: [] };
  const { first, end } = binRange(trueAxis);
  const moments = cellMoments(input.posterior);
  const flags: Flag[] = [];
  const readings = tally.columnNames.map((_, k): Reading => {
    if (k < first || k >= end) return { reason: OUTER_COLUMN };
    const purity = purityOf(moments, reference.contents, k);
    if (!purity) return { reason: NO_CONTENT };
    flags.push(impureFlag(input, tally.outcomeNames[k]!, purity));
    return { value: purity.value, ...ratioInterval(purity, input.study.credibility) };
  });
  return { columns: { purity: listMeasure(tally.columnNames, readings) }, flags };
}

/** Purity of outcome `k`; `null` where nothing is expected there. */
function purityOf(
  { mean, variance }: { mean: Float64Array; variance: Float64Array },
  contents: Float64Array,
  k: number,
): ContentRatio | null {
  const outcomes = mean.length / contents.length;
  const own = { mean: 0, variance: 0 };
  const other = { mean: 0, variance: 0 };
  contents.forEach((s, j) => {
    const side = j === k ? own : other;
    side.mean += s * mean[j * outcomes + k]!;
    side.variance += s * s * variance[j * outcomes + k]!;
  });
  return contentRatio(own, other);
}

function impureFlag(input: AuditInput, bin: string, purity: ContentRatio): Flag {
  const limit = input.study.limits.impure;
  const { value, sd } = purity;
  const { lower, upper } = ratioInterval(purity, input.study.credibility);
  const probability = ratioBelow(purity, limit);
  const state = answer(probability, input.study.credibility);
  const evidence = `${formatShare(value, lower, upper)} of the expected content was generated in the matching true bin`;
  const advice = adviceOf(input, state, value, sd);
  return { id: 'impure', column: null, bin, state, value, lower, upper, limit, probability, evidence, advice };
}

function adviceOf(input: AuditInput, state: FlagState, value: number, sd: number): string {
  if (state === 'clear') return '';
  if (state === 'flagged') return 'more calibration events will not lift it: use bins wider than the resolution here';
  const counted = input.tally.cells.events.reduce((a, b) => a + b, 0);
  return growthAdvice(input, { value, sd, limit: input.study.limits.impure, counted });
}
