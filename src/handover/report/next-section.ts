import { formatCount, formatEvents, formatNumber, formatPercent } from '../../audit/wording';
import { flagName, type Section } from './section';
import { placeInWords } from './flags-section';
import { markup, Markup, tableOf } from './markup';
import { sumOf, type MeasurePlan } from './measure-next';
import type { ReportSource } from './report-source';

/** The next campaign: events to add to each column and for what, the price of every undecided answer, what as many events again bring. */
export const nextSection: Section = { id: 'next', title: 'What to measure next', body: next };

function next(source: ReportSource): Markup {
  return markup`${columnPlan(source)}${prices(source)}${outlook(source.plan)}`;
}

function columnPlan(source: ReportSource): Markup {
  const { plan, analysis, column } = source;
  const wanted = [...plan.all.keys()].filter((j) => plan.all[j]! > 0);
  if (wanted.length === 0) return markup`<p>No column needs more events for the limits of this study.</p>`;
  const settle = (j: number): number =>
    plan.settlements.reduce(
      (most, { plan, isAffordable }) => Math.max(most, (isAffordable && plan.added?.[j]) || 0),
      0,
    );
  const number = (n: number): string => (n > 0 ? formatEvents(n) : '–');
  const rows = wanted.map((j) => [
    column(j),
    formatCount(plan.events[j]!),
    number(plan.populate[j]!),
    number(plan.influence[j]!),
    markup`<b>${number(plan.needed[j]!)}</b>`,
    number(settle(j)),
    number(plan.all[j]!),
  ]);
  const total = (added: Float64Array): string => number(sumOf(added));
  rows.push([
    'in all',
    formatCount(sumOf(plan.events)),
    total(plan.populate),
    total(plan.influence),
    total(plan.needed),
    '',
    total(plan.all),
  ]);
  const { limits, credibility } = analysis.study;
  const head = [
    'Column',
    'Events now',
    'to populate',
    'for the reference',
    'Needed',
    'to settle',
    'Needed and to settle',
  ];
  return markup`<p>Events to add to each column, rounded up to two digits. <i>To populate</i>: the column is no longer empty, thin or led by the prior. <i>For the reference</i>: in every reconstructed bin that the matrix limits or may limit, its variance falls surely (${formatPercent(credibility)}) below ${formatNumber(limits['matrix-limited'])} times that of the data to come (${analysis.reference.description}). <b>Needed</b>: the larger of the two, since an event serves every purpose of its column. <i>To settle</i>: undecided answers that cost no more events than the calibration has; a choice, not a need.</p>
${tableOf(head, rows, { numeric: [1, 2, 3, 4, 5, 6], kind: 'plain summed' })}`;
}

/** Answers listed that cannot be settled by as many events as there are; the others are counted. */
const MOST_PRICES = 30;

function prices(source: ReportSource): Markup | null {
  const { settlements } = source.plan;
  if (settlements.length === 0) return null;
  const affordable = settlements.filter(({ isAffordable }) => isAffordable).length;
  const shown = settlements.slice(0, Math.max(affordable, MOST_PRICES));
  const left = settlements.length - shown.length;
  const rows = shown.map(({ flag, plan, isAffordable }) => [
    flagName(flag.id, 'undecided'),
    placeInWords(source, flag),
    plan.total === null ? '–' : formatEvents(plan.total),
    plan.total === null
      ? plan.reason
      : isAffordable
        ? 'in the last column of the plan'
        : 'more than the whole calibration: take it as lying at the limit',
  ]);
  return markup`<h3>The price of every undecided answer</h3>
<p>Events after which the answer is expected to be settled, whichever way, in 95 of 100 campaigns under the present posterior.</p>
${tableOf(['Answer', 'Where', 'Events to add', ''], rows, { numeric: [2] })}${left > 0 ? markup`<p class="quiet">And ${formatCount(left)} more that take more than the whole calibration or cannot be settled; <code>entasis plan</code> lists all.</p>` : null}`;
}

function outlook({ again, events }: MeasurePlan): Markup | null {
  if (!again) return null;
  const now = sumOf(events);
  const worst = (ratios: readonly (number | null)[]): string =>
    formatNumber(
      ratios.reduce<number>((most, ratio) => Math.max(most, ratio ?? 0), 0),
      2,
    );
  const mean = (ratios: readonly (number | null)[]): string => {
    const known = ratios.filter((ratio) => ratio !== null);
    return formatNumber(sumOf(known) / known.length, 2);
  };
  const { measured, optimal } = again;
  const row = (text: string, ratios: readonly (number | null)[]): string[] => [text, mean(ratios), worst(ratios)];
  return markup`<h3>As many events again</h3>
<p>Variance from the matrix over the variance of the data to come, mean and largest over the reconstructed bins, now and with ${formatCount(now)} more events.</p>
${tableOf(
  ['Campaign', 'Mean ratio', 'Largest ratio'],
  [
    row('now', measured.before),
    row('spread over the columns as measured', measured.after),
    row('spread where they pay most', optimal.after),
  ],
  { numeric: [1, 2] },
)}`;
}
