import { outcomePlaces, type AuditInput } from './audit-input';
import { columnShares, readingOf } from './column-share';
import type { Findings } from './findings';
import { listMeasure } from './measure';
import { shareFlag, type ShareLimit } from './share-flag';
import { countOf, formatCount, formatShare } from './wording';

export const LOSSES_UNRECORDED = 'losses are not recorded, so efficiency is not measurable';

/** Efficiency `1 - p_lost` of every column, and the flag `lossy`. Both are absent where losses are not recorded. */
export function auditLoss(input: AuditInput): Findings {
  const { lost } = outcomePlaces(input);
  const { columnNames, outcomeNames } = input.tally;
  if (lost === null) return { columns: { efficiency: { value: null, reason: LOSSES_UNRECORDED } }, flags: [] };
  const kept = [...outcomeNames.keys()].filter((k) => k !== lost);
  const shares = columnShares(input, kept);
  const rule: ShareLimit = {
    id: 'lossy',
    limit: input.study.limits.lossy,
    side: 'below',
    credibility: input.study.credibility,
    evidence: ({ mean, lower, upper, inside, events }) =>
      `efficiency ${formatShare(mean, lower, upper)}: ${formatCount(events - inside)} of ${countOf(events, 'event')} lost`,
    remedy: 'more calibration events will not lift it: find the cause of the losses, or leave the column out of use',
  };
  return {
    columns: { efficiency: listMeasure(columnNames, shares.map(readingOf)) },
    flags: shares.map((share, j) => shareFlag(columnNames[j]!, share, rule)),
  };
}
