import { columnEvents, type AuditInput } from './audit-input';
import { countFlag } from './count-flag';
import type { Findings } from './findings';
import type { Flag } from './flag';
import { rowSums } from '../tally/tally';
import { countOf, eventsOf, formatPercent } from './wording';

/** The flag `single-event`: the largest share of one event in a column's squared weight; 1 / n without weights. */
export function auditSingleEvent(input: AuditInput): Findings {
  const { tally, study } = input;
  const events = columnEvents(input);
  const squares = tally.cells.squares ? rowSums(tally.cells.squares, tally.outcomeNames.length) : events;
  const limit = study.limits['single-event'];
  const flags = tally.columnNames.map((column, j) => {
    const largest = tally.largestSquare ? tally.largestSquare[j]! : Math.min(1, events[j]!);
    return singleEventFlag(column, events[j]!, largest, squares[j]!, limit);
  });
  return { flags };
}

function singleEventFlag(column: string, events: number, largest: number, squares: number, limit: number): Flag {
  const value = squares > 0 ? Math.min(1, largest / squares) : 0;
  const others = events > 1 && value < 1 ? (squares - largest) / (events - 1) : largest;
  const missing = (largest / limit - squares) / others;
  return countFlag({
    id: 'single-event',
    column,
    value,
    limit,
    isBeyond: value > limit,
    evidence: `one of ${countOf(events, 'event')} holds ${formatPercent(value)} of the squared weight`,
    remedy: Number.isFinite(missing)
      ? `about ${eventsOf(missing, 'more ')} like the others would bring it to ${formatPercent(limit)}; look at that event first`
      : 'no number of events brings it to zero: look at that event',
  });
}
