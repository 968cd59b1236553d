import { outcomePlaces, type AuditInput } from './audit-input';
import { columnShares, readingOf } from './column-share';
import type { Findings } from './findings';
import { listMeasure } from './measure';

/** Probability of ending in the reconstructed window, column by column. It has no limit and so no flag. */
export function auditAcceptance(input: AuditInput): Findings {
  const shares = columnShares(input, outcomePlaces(input).window);
  return { columns: { acceptance: listMeasure(input.tally.columnNames, shares.map(readingOf)) }, flags: [] };
}
