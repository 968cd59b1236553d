import { columnEvents, type AuditInput } from '../../audit/audit-input';
import type { Flag } from '../../audit/flag';
import type { Influence } from '../../audit/influence';
import { planCampaign, planFlag, type Campaign, type Plan } from '../../audit/planner';
import { eventsToPopulate } from '../../audit/population';
import type { ReferenceSpectrum } from '../../audit/reference';
import { PLAN_PRECISION } from '../../audit/spreading';

/** An undecided flag and what it costs to settle it. */
export interface Settlement {
  flag: Flag;
  plan: Plan;
  /** Whether it takes no more events than the calibration has already. */
  isAffordable: boolean;
}

/** What must still be measured, and what that would bring. Lists are over columns. */
export interface MeasurePlan {
  /** Events there are now. */
  events: Float64Array;
  /** Events to add for empty, thin and prior-led columns; 0 where no number of them helps. */
  populate: Float64Array;
  /** So that no reconstructed bin is limited by the matrix. */
  influence: Float64Array;
  /** What each column needs for both: a limit that is passed, or a bin that the matrix may limit. */
  needed: Float64Array;
  /** The other undecided flags, cheapest first. */
  settlements: Settlement[];
  /** What each column needs if the affordable ones of these shall be settled too. */
  all: Float64Array;
  /** As many events again, spread as measured and spread where they pay most; `null` where there is no influence. */
  again: { measured: Campaign; optimal: Campaign } | null;
}

/** Plans the next campaign from the audit: events serve every purpose at once, so a column needs the most that any one asks for. */
export function planNext(
  input: AuditInput,
  reference: ReferenceSpectrum,
  influence: Influence,
  flags: readonly Flag[],
): MeasurePlan {
  const events = columnEvents(input);
  const now = sumOf(events);
  const plan = (flag: Flag): Plan => planFlag(input, reference, influence, flag);
  const populate = eventsToPopulate(input).map((n) => (Number.isFinite(n) ? n : 0));
  const limiting = flags.filter(({ id, state }) => id === 'matrix-limited' && state !== 'clear');
  // The planner settles what is undecided: a bin that is flagged is cleared by the same reckoning.
  const clearing = limiting.map((flag) => plan({ ...flag, state: 'undecided' }));
  const enough = most(events.length, clearing).map((n, j) => (n > PLAN_PRECISION * events[j]! + 1 ? n : 0));
  const settlements = flags
    .filter(({ id, state }) => state === 'undecided' && id !== 'matrix-limited')
    .map((flag): Settlement => ({ flag, plan: plan(flag), isAffordable: false }))
    .map((one) => ({ ...one, isAffordable: one.plan.total !== null && one.plan.total <= now }))
    .sort((a, b) => (a.plan.total ?? Infinity) - (b.plan.total ?? Infinity));
  const needed = most(events.length, [{ added: populate }, { added: enough }]);
  const affordable = settlements.filter(({ isAffordable }) => isAffordable).map(({ plan }) => plan);
  const all = most(events.length, [{ added: needed }, ...affordable]);
  return { events, populate, influence: enough, needed, settlements, all, again: again(input, influence, now) };
}

/** The sum of a list. */
export function sumOf(values: Iterable<number>): number {
  let sum = 0;
  for (const value of values) sum += value;
  return sum;
}

/** The most that any of the plans asks for, column by column. */
function most(columns: number, plans: readonly { added: Float64Array | null }[]): Float64Array {
  return Float64Array.from({ length: columns }, (_, j) =>
    plans.reduce((greatest, { added }) => Math.max(greatest, added?.[j] ?? 0), 0),
  );
}

function again(input: AuditInput, influence: Influence, events: number): MeasurePlan['again'] {
  const measured = planCampaign(input, influence, events, 'measured');
  const optimal = planCampaign(input, influence, events, 'optimal');
  return 'reason' in measured || 'reason' in optimal ? null : { measured, optimal };
}
