import { columnEvents, unitOf, type AuditInput } from './audit-input';
import { countFlag } from './count-flag';
import type { Findings } from './findings';
import type { Flag } from './flag';
import { countOf, eventsOf, formatUncertain } from './wording';

/** Standard deviations from zero at which the sign of a cell's weight is taken as settled. */
const SIGN_SETTLED = 2;
/** Cells named in the evidence of one column. */
const MOST_NAMED = 3;

/** The flag `negative-weight`: cells that have events but no positive weight. There is none without weights. */
export function auditNegativeWeight(input: AuditInput): Findings {
  if (!input.tally.weighted) return { flags: [] };
  const events = columnEvents(input);
  return { flags: input.tally.columnNames.map((column, j) => negativeFlag(input, column, j, events[j]!)) };
}

interface Cell {
  name: string;
  events: number;
  weight: number;
  uncertainty: number;
}

function negativeFlag(input: AuditInput, column: string, j: number, events: number): Flag {
  const cells = clampedCells(input, j);
  const named = cells.slice(0, MOST_NAMED).map(describe);
  const more = cells.length > named.length ? [`and ${cells.length - named.length} more`] : [];
  return countFlag({
    id: 'negative-weight',
    column,
    value: cells.length,
    limit: 0,
    isBeyond: cells.length > 0,
    evidence: cells.length === 0 ? 'every cell with events has a positive weight' : [...named, ...more].join('; '),
    remedy: cells.length === 0 ? '' : remedyOf(cells, events),
  });
}

function clampedCells({ tally, posterior, recoAxis }: AuditInput, j: number): Cell[] {
  const from = j * posterior.outcomes;
  const { events, weights, squares } = tally.cells;
  return posterior.clamped
    .filter((i) => i >= from && i < from + posterior.outcomes)
    .map((i) => ({
      name: tally.outcomeNames[i - from]! + (tally.outcomeNames[i - from]!.startsWith('[') ? unitOf(recoAxis) : ''),
      events: events[i]!,
      weight: weights![i]!,
      uncertainty: Math.sqrt(squares![i]!),
    }));
}

function describe({ name, weight, uncertainty, events }: Cell): string {
  return `${name}: weight ${formatUncertain(weight, uncertainty)} from ${countOf(events, 'event')}`;
}

function remedyOf(cells: Cell[], events: number): string {
  const kept = 'these cells keep their prior alone';
  const surest = Math.max(...cells.map(({ weight, uncertainty }) => (uncertainty > 0 ? -weight / uncertainty : 0)));
  if (surest >= SIGN_SETTLED) return `${kept}; a weight so far below zero is no fluctuation: correct the weights`;
  if (surest === 0) return `${kept}; a weight of zero tells nothing of its sign: merge bins, or add events`;
  const missing = events * ((SIGN_SETTLED / surest) ** 2 - 1);
  return `${kept}; about ${eventsOf(missing, 'more ')} in this column would tell a fluctuation from a truly negative content, or merge bins`;
}
