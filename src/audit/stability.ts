import { axesMatch, binRange } from '../study/axis';
import { outcomePlaces, type AuditInput } from './audit-input';
import { columnShare, readingOf, type ColumnShare } from './column-share';
import type { Findings } from './findings';
import type { Flag } from './flag';
import { listMeasure, type Reading } from './measure';
import { shareFlag, type ShareLimit } from './share-flag';
import { countOf, formatCount, formatShare } from './wording';

export const NO_MATCHING_BINS = 'the two axes differ, so no bin matches a column';
export const OUTER_COLUMN = 'an outer column has no matching bin';

/**
 * Stability of every column: the share of its window content that stays in the matching bin (the usual HEP definition,
 * common practice), and the flag `unstable`. Exact: the window part of a Dirichlet is a Dirichlet. Needs equal axes.
 */
export function auditStability(input: AuditInput): Findings {
  const { trueAxis, recoAxis, study, tally } = input;
  if (!axesMatch(trueAxis, recoAxis)) {
    return { columns: { stability: { value: null, reason: NO_MATCHING_BINS } }, flags: [] };
  }
  const { window } = outcomePlaces(input);
  const rule: ShareLimit = {
    id: 'unstable',
    limit: study.limits.unstable,
    side: 'below',
    credibility: study.credibility,
    evidence: ({ mean, lower, upper, inside, events }) =>
      `stability ${formatShare(mean, lower, upper)}: ${formatCount(inside)} of ${countOf(events, 'event')} in the window are in the matching bin`,
    remedy: 'more calibration events will not lift it: use bins wider than the resolution here',
  };
  const { first, end } = binRange(trueAxis);
  const readings: Reading[] = [];
  const flags: Flag[] = [];
  tally.columnNames.forEach((column, j) => {
    if (j < first || j >= end) return readings.push({ reason: OUTER_COLUMN });
    const share = columnShare(input, j, [j], window);
    flags.push(shareFlag(column, share, rule));
    return readings.push(stabilityReading(share));
  });
  return { columns: { stability: listMeasure(tally.columnNames, readings) }, flags };
}

function stabilityReading(share: ColumnShare | null): Reading {
  return share ? readingOf(share) : { reason: 'no events in the window and a prior of zero' };
}
