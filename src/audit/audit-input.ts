import { binRange, type Axis } from '../study/axis';
import type { Study } from '../study/study';
import type { Posterior } from '../posterior/posterior';
import type { Tally } from '../tally/tally';

/** What an audit looks at. `tally` and `posterior` have the columns of `trueAxis` and the outcomes of `recoAxis`. */
export interface AuditInput {
  study: Study;
  trueAxis: Axis;
  recoAxis: Axis;
  tally: Tally;
  posterior: Posterior;
}

/** Where the outcomes stand in a column; `null` where the axis has no such outcome, or losses are not recorded. */
export interface OutcomePlaces {
  window: number[];
  below: number | null;
  above: number | null;
  lost: number | null;
}

export function outcomePlaces({ study, recoAxis }: AuditInput): OutcomePlaces {
  const { first, end } = binRange(recoAxis);
  const isNumeric = recoAxis.kind === 'numeric';
  const inside = isNumeric ? end + 1 : end;
  return {
    window: Array.from({ length: end - first }, (_, i) => first + i),
    below: isNumeric ? 0 : null,
    above: isNumeric ? end : null,
    lost: study.lost === 'missing' ? inside : null,
  };
}

/** Number of events of each column, `[columns]`. */
export function columnEvents({ tally }: AuditInput): Float64Array {
  const outcomes = tally.outcomeNames.length;
  return Float64Array.from(tally.columnNames, (_, j) =>
    tally.cells.events.subarray(j * outcomes, (j + 1) * outcomes).reduce((sum, n) => sum + n, 0),
  );
}

/** The unit of an axis as it follows a number: empty, or a space and the unit. */
export function unitOf(axis: Axis): string {
  return axis.unit ? ` ${axis.unit}` : '';
}
