import { columnOf } from '../posterior/posterior';
import { binRange, midpoint, type NumericAxis } from '../study/axis';
import { outcomePlaces, type AuditInput } from './audit-input';

/** A column seen inside the window alone: normalised gammas of its reconstructed bins. */
export interface WindowResponse {
  shape: Float64Array;
  /** `null` where the part is a Dirichlet. */
  scale: Float64Array | null;
  /** Events of the column in the window. */
  events: number;
}

/** The window part of column `j`; `null` where it has no events there: its prior alone says nothing of a response. */
export function windowResponse(input: AuditInput, j: number): WindowResponse | null {
  const { window } = outcomePlaces(input);
  const { outcomes } = input.posterior;
  const events = window.reduce((sum, k) => sum + input.tally.cells.events[j * outcomes + k]!, 0);
  if (events === 0) return null;
  const { shape, scale } = columnOf(input.posterior, j);
  const [first, end] = [window[0]!, window[window.length - 1]! + 1];
  return { shape: shape.slice(first, end), scale: scale && scale.slice(first, end), events };
}

export const NOTHING_IN_WINDOW = 'no events in the reconstructed window';

/** Centres of the bins of an axis; geometric on a log axis. */
export function binCentres(axis: NumericAxis): Float64Array {
  return Float64Array.from({ length: axis.edges.length - 1 }, (_, i) => midpoint(axis, i));
}

/**
 * `r - t` has a meaning where both axes are numeric in the same unit, and a column has a centre `t`; on a log true axis
 * it is `r / t - 1`. One reconstructed bin shows neither a mean nor a width. Else the reason why there is none.
 */
export function whyNoDifference({ trueAxis, recoAxis }: AuditInput): string | null {
  if (trueAxis.kind === 'tags' || recoAxis.kind === 'tags') return 'tags have no distance from each other';
  if (trueAxis.unit !== recoAxis.unit)
    return `the axes differ in unit (${trueAxis.unit || 'none'}, ${recoAxis.unit || 'none'})`;
  return recoAxis.edges.length === 2 ? 'one reconstructed bin shows neither mean nor width' : null;
}

/** `r - t`, or `r / t - 1` on a log true axis, of reconstructed values `r` in column `j`; `null` for an outer column. */
export function differences(trueAxis: NumericAxis, j: number, values: Float64Array): Float64Array | null {
  const { first, end } = binRange(trueAxis);
  if (j < first || j >= end) return null;
  const t = midpoint(trueAxis, j - first);
  return values.map((r) => (trueAxis.spacing === 'log' ? r / t - 1 : r - t));
}

export const NO_CENTRE = 'an outer column has no centre';
