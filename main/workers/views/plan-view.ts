import { formatCount } from '../../../src/audit/wording';
import { planCampaign, planEfficiency, planFlag, planMatrixShare, type Plan } from '../../../src/audit/planner';
import { isAbsent } from '../../../src/audit/measure';
import { binRange } from '../../../src/study/axis';
import type { Checked, PlanView } from '../../bridge';
import type { Audited } from '../analysis';

type Target = Checked<'plan'>['target'];
type Ratios = Pick<PlanView, 'before' | 'after'>;

/** Events to add to each column for a target, or what so many more events would bring. */
export function planView(audited: Audited, target: Target): PlanView {
  if ('events' in target) return campaignView(audited, target.events, target.spread);
  if ('settleFlags' in target) return settlingView(audited);
  const { analysis, deep } = audited;
  if ('efficiencySd' in target) {
    return planned(audited, planEfficiency(analysis, target.efficiencySd), NO_RATIOS, 'efficiency known as asked');
  }
  // The planner's share is of matrix and data together, the target's a ratio of the two.
  const share = target.matrixShare / (1 + target.matrixShare);
  const before = ratiosOf(audited);
  const plan = planMatrixShare(analysis, deep!.influence, share);
  return planned(audited, plan, { before, after: null }, 'every bin within the target');
}

const NO_RATIOS: Ratios = { before: null, after: null };

function planned({ analysis }: Audited, plan: Plan, ratios: Ratios, met: string): PlanView {
  const { columnNames } = analysis.tally;
  const add = plan.added ?? new Float64Array(columnNames.length);
  const total = plan.total ?? 0;
  const more = total === 0 ? 'no more events are needed' : `${formatCount(total)} more events`;
  const note = plan.reason ?? `${more}: ${met}`;
  return { columnNames, add, total, reachable: plan.reason === null, note, ...ratios, seconds: 0 };
}

/** One plan for every undecided flag: each column gets what the most demanding of its flags asks for. */
function settlingView(audited: Audited): PlanView {
  const { analysis, reference, deep, flags } = audited;
  const undecided = flags.filter(({ state }) => state === 'undecided');
  const plans = undecided.map((flag) => planFlag(analysis, reference, deep!.influence, flag));
  const add = new Float64Array(analysis.tally.columnNames.length);
  for (const { added } of plans) added?.forEach((events, j) => (add[j] = Math.max(add[j]!, events)));
  const total = add.reduce((sum, events) => sum + events, 0);
  const settled = plans.filter(({ reason }) => reason === null).length;
  const left = undecided.length - settled;
  const note =
    undecided.length === 0
      ? 'no flag is undecided'
      : `${formatCount(total)} more events are expected to settle ${settled} of ${undecided.length} undecided flags` +
        (left > 0 ? `; more events of the same kind do not settle the other ${left}` : '');
  const { columnNames } = analysis.tally;
  return { columnNames, add, total, reachable: left === 0, note, ...NO_RATIOS, seconds: 0 };
}

function campaignView(audited: Audited, events: number, spread: 'as measured' | 'optimal'): PlanView {
  const { analysis, deep } = audited;
  const how = spread === 'optimal' ? 'optimal' : 'measured';
  const campaign = planCampaign(analysis, deep!.influence, events, how);
  const { columnNames } = analysis.tally;
  if ('reason' in campaign) {
    const add = new Float64Array(columnNames.length);
    return { columnNames, add, total: 0, reachable: false, note: campaign.reason, ...NO_RATIOS, seconds: 0 };
  }
  const list = (values: (number | null)[]): Float64Array => Float64Array.from(values, (value) => value ?? NaN);
  const [before, after] = [list(campaign.before), list(campaign.after)];
  const note = `${formatCount(events)} more events, spread ${spread === 'optimal' ? 'where they pay most' : spread}`;
  return { columnNames, add: campaign.added, total: events, reachable: true, note, before, after, seconds: 0 };
}

/** Matrix variance over data variance in each bin; NaN where the reference spectrum gives it nothing. */
function ratiosOf({ deep, analysis }: Audited): Float64Array | null {
  const { ratio } = deep!.influence;
  const { first, end } = binRange(analysis.recoAxis);
  if (isAbsent(ratio) || ratio.value.length !== end - first) return null;
  return Float64Array.from(ratio.value, (value) => value ?? NaN);
}
