import type { ColumnShare } from './column-share';
import { NO_POSTERIOR } from './column-share';
import { answer, type Flag, type FlagId, type FlagState } from './flag';
import { eventsToClear, eventsToSettle, probabilityBeyond, type Side } from './limits';
import { eventsOf, formatPercent } from './wording';

export interface ShareLimit {
  id: FlagId;
  limit: number;
  side: Side;
  credibility: number;
  /** What was seen, in numbers. */
  evidence: (share: ColumnShare) => string;
  /** What to do once the answer is `flagged`: more events do not change an established share. */
  remedy: string;
}

/** The three answers for a share of a column; a column without events is undecided, whatever its prior says. */
export function shareFlag(column: string, share: ColumnShare | null, rule: ShareLimit): Flag {
  const place = { id: rule.id, column, bin: null, limit: rule.limit };
  if (!share) {
    const advice = 'add events to this column or give it a prior above zero';
    const unknown = { value: null, lower: null, upper: null, probability: null };
    return { ...place, ...unknown, state: 'undecided', evidence: NO_POSTERIOR, advice };
  }
  const probability = probabilityBeyond(share.marginal, rule.limit, rule.side);
  const state = share.events === 0 ? 'undecided' : answer(probability, rule.credibility);
  const evidence = share.events === 0 ? 'no events: the prior alone speaks' : rule.evidence(share);
  const { mean: value, lower, upper } = share;
  return { ...place, value, lower, upper, probability, state, evidence, advice: adviceOf(state, share, rule) };
}

function adviceOf(state: FlagState, share: ColumnShare, rule: ShareLimit): string {
  if (state === 'clear') return '';
  if (state === 'flagged') return rule.remedy;
  const { limit, side, credibility } = rule;
  if (share.events === 0) {
    const least = eventsToClear(share.marginal, limit, side, credibility, share.growth);
    if (least === null) return `no feasible number of events can clear a limit of ${formatPercent(limit)}`;
    return `at least ${eventsOf(least)} in this column, none of them beyond the limit, would clear it`;
  }
  const settled = eventsToSettle(share.marginal, limit, side, credibility, share.growth);
  if (!settled) {
    return `${formatPercent(share.mean)} is too close to the limit of ${formatPercent(limit)} for any feasible number of events to settle it`;
  }
  const other = settled.as === 'flagged' ? 'clear it' : 'flag it';
  return `about ${eventsOf(settled.events, 'more ')} in this column would settle it as ${settled.as} if the share stays at ${formatPercent(share.mean)}; they would not ${other}`;
}
