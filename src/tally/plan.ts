import type { Need } from '../events/batch';
import { binRange, columnNames, midpoint, outcomeNames, type Axis } from '../study/axis';
import { resolveAxis } from '../study/resolve-axis';
import type { Cut, Study } from '../study/study';

/** What a study asks of the rows of an event file: plain data that a worker can be handed. */
export interface TallyPlan {
  needs: Need[];
  /** Which need serves which role; -1 where the study has no such role. `cuts` has one entry a cut. */
  at: { true: number; reconstructed: number; weight: number; run: number; event: number; cuts: number[] };
  cuts: Cut[];
  trueAxis: Axis;
  recoAxis: Axis;
  /** `"missing"`: a row without a reconstructed value is a lost event. */
  lostRecorded: boolean;
  countUnmatched: boolean;
  columnNames: string[];
  outcomeNames: string[];
}

/** The plan of a checked study: its axes with their edges, and the columns it needs, each once. */
export function tallyPlan(study: Study): TallyPlan {
  const { roles, cuts } = study;
  const trueAxis = resolveAxis(study.axes.true);
  const recoAxis = resolveAxis(study.axes.reconstructed);
  const lostRecorded = study.lost === 'missing';
  const needs: Need[] = [];
  const need = (column: string | undefined, as: Need['as']): number => {
    if (column === undefined) return -1;
    const known = needs.findIndex((n) => n.column === column && n.as === as);
    return known >= 0 ? known : needs.push({ column, as }) - 1;
  };
  const at = {
    true: need(roles.true, trueAxis.kind === 'tags' ? 'text' : 'number'),
    reconstructed: need(roles.reconstructed, recoAxis.kind === 'tags' ? 'text' : 'number'),
    weight: need(roles.weight, 'number'),
    run: need(roles.run, 'text'),
    event: need(roles.event, 'identity'),
    cuts: cuts.map((cut) => need(cut.column, cutsText(cut) ? 'text' : 'number')),
  };
  return {
    needs,
    at,
    cuts,
    trueAxis,
    recoAxis,
    lostRecorded,
    countUnmatched: study.unmatched === 'count',
    columnNames: columnNames(trueAxis),
    outcomeNames: outcomeNames(recoAxis, lostRecorded),
  };
}

function cutsText(cut: Cut): boolean {
  return typeof (Array.isArray(cut.value) ? cut.value[0] : cut.value) === 'string';
}

/**
 * `[columns]`: where each column splits in two halves. `Infinity` for `below`, `above` and tags, which have no
 * midpoint and stand in their first half alone.
 */
export function midpoints(axis: Axis): Float64Array {
  const middles = new Float64Array(columnNames(axis).length).fill(Infinity);
  if (axis.kind === 'tags') return middles;
  const { first, end } = binRange(axis);
  for (let j = first; j < end; j++) middles[j] = midpoint(axis, j - first);
  return middles;
}

/** A plan as JSON: edges as lists. Equal plans give equal text. */
export function planText(plan: TallyPlan): string {
  return JSON.stringify(plan, (_, value) => (value instanceof Float64Array ? Array.from(value) : (value as unknown)));
}

/** The plan of a text that `planText` made. */
export function planOfText(text: string): TallyPlan {
  const plan = JSON.parse(text) as TallyPlan;
  for (const axis of [plan.trueAxis, plan.recoAxis]) {
    if (axis.kind === 'numeric') axis.edges = Float64Array.from(axis.edges);
  }
  return plan;
}

/** What two parts must share to be parts of one tally: roles, cuts, edges and rules, but no label and no unit. */
export function planIdentity(plan: TallyPlan): string {
  const bare = (axis: Axis): Axis => ({ ...axis, label: '', unit: '' }) as Axis;
  return planText({ ...plan, trueAxis: bare(plan.trueAxis), recoAxis: bare(plan.recoAxis) });
}
