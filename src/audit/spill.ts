import { outcomePlaces, unitOf, type AuditInput } from './audit-input';
import { columnShares, readingOf } from './column-share';
import type { Findings } from './findings';
import { listMeasure } from './measure';
import { shareFlag, type ShareLimit } from './share-flag';
import { countOf, formatCount, formatNumber, formatShare } from './wording';

const NO_OUTSIDE = 'the reconstructed axis is a list of tags: there is no outside of it';

/** Spill below and above the reconstructed window, and the flags `spill-below`, `spill-above`. Tag axes have none. */
export function auditSpill(input: AuditInput): Findings {
  const below = auditSide(input, 'below');
  const above = auditSide(input, 'above');
  return { columns: { spillBelow: below.measure, spillAbove: above.measure }, flags: [...below.flags, ...above.flags] };
}

function auditSide(input: AuditInput, side: 'below' | 'above') {
  const { recoAxis, tally, study } = input;
  const outcome = outcomePlaces(input)[side];
  if (outcome === null || recoAxis.kind === 'tags') return { measure: { value: null, reason: NO_OUTSIDE }, flags: [] };
  const id = `spill-${side}` as const;
  const edge = side === 'below' ? recoAxis.edges[0]! : recoAxis.edges[recoAxis.edges.length - 1]!;
  const where = `${side === 'below' ? 'below' : 'at or above'} ${formatNumber(edge, 6)}${unitOf(recoAxis)}`;
  const rule: ShareLimit = {
    id,
    limit: study.limits[id],
    side: 'above',
    credibility: study.credibility,
    evidence: ({ mean, lower, upper, inside, events }) =>
      `${formatShare(mean, lower, upper)} reconstructed ${where}: ${formatCount(inside)} of ${countOf(events, 'event')}`,
    remedy: `more calibration events will not lower it: ${side === 'below' ? 'start the reconstructed axis lower' : 'end the reconstructed axis higher'}, or accept that this part of the column informs no bin`,
  };
  const shares = columnShares(input, [outcome]);
  return {
    measure: listMeasure(tally.columnNames, shares.map(readingOf)),
    flags: shares.map((share, j) => shareFlag(tally.columnNames[j]!, share, rule)),
  };
}
