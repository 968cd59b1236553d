import type { AuditInput } from './audit-input';
import { growthToSettle } from './settling';
import { formatEvents, formatNumber } from './wording';

/**
 * What would settle an undecided limit of a measure that rests on several columns: as many times the calibration
 * events, spread over the columns as now, with `counted` of them in the columns that matter.
 */
export function growthAdvice(
  input: AuditInput,
  measure: { value: number; sd: number; limit: number; counted: number },
): string {
  const { value, sd, limit, counted } = measure;
  const growth = growthToSettle(value, sd, limit, input.study.credibility);
  if (growth === null) {
    return `${formatNumber(value)} is too close to the limit of ${formatNumber(limit)} for any feasible number of events to settle it`;
  }
  const events = formatEvents((growth - 1) * counted);
  return `about ${formatNumber(growth, 2)} times the calibration events (${events} more, spread as now) would settle it`;
}
