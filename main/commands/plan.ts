import { isAbsent } from '../../src/audit/measure';
import { planCampaign, planEfficiency, planMatrixShare, type Campaign, type Plan } from '../../src/audit/planner';
import { formatCount, formatEvents, formatNumber } from '../../src/audit/wording';
import type { Analysis } from '../../src/handover/analyse';
import { analyseBundle } from '../../src/handover/bundle-tally';
import { openBundle } from '../../src/handover/open-bundle';
import { planNext, sumOf, type MeasurePlan } from '../../src/handover/report/measure-next';
import { InputError } from '../../src/study/input-error';
import { alignedLines } from './aligned-lines';

export interface PlanFlags {
  matrixShare?: number;
  efficiencySd?: number;
  events?: number;
  json?: boolean;
}

/**
 * `entasis plan BUNDLE`: events to add to each column, for the limits of the study or, with an option, for a target, or what
 * so many more events would bring.
 */
export function plan(path: string, flags: PlanFlags): void {
  const targets = [flags.matrixShare, flags.efficiencySd, flags.events].filter((target) => target !== undefined);
  if (targets.length > 1) throw new InputError('usage', 'more than one target', 'name one of them');
  const analysis = analyseBundle(openBundle(path));
  const { json, lines } = answerOf(analysis, flags);
  const { title } = analysis.study;
  const { columnNames: columns } = analysis.tally;
  const text = [title, `reference spectrum: ${analysis.reference.description}`, ...lines].join('\n');
  process.stdout.write(`${flags.json ? JSON.stringify({ bundle: path, title, columns, ...json }) : text}\n`);
}

interface Answer {
  json: Record<string, unknown>;
  lines: string[];
}

function answerOf(analysis: Analysis, { matrixShare, efficiencySd, events }: PlanFlags): Answer {
  const { influence } = analysis.audit.deep!;
  if (events !== undefined) return campaignAnswer(analysis, events);
  if (matrixShare !== undefined) {
    const words = `matrix share of the variance at most ${formatNumber(matrixShare)} in every reconstructed bin`;
    return planAnswer(analysis, planMatrixShare(analysis, influence, matrixShare), words);
  }
  if (efficiencySd !== undefined) {
    const words = `efficiency known to a relative sd of ${formatNumber(efficiencySd)} in every column`;
    return planAnswer(analysis, planEfficiency(analysis, efficiencySd), words);
  }
  return limitsAnswer(analysis);
}

/** One target: events to add, or why there is no such plan. */
function planAnswer({ tally }: Analysis, { added, total, reason }: Plan, target: string): Answer {
  const json = { target, add: added && [...added], total, reason };
  if (added === null) return { json, lines: [`${target}: not to be had: ${reason}`] };
  const rows = tally.columnNames.flatMap((name, j) => (added[j]! > 0 ? [[name, formatCount(added[j]!)]] : []));
  const lines = [
    `${target}: ${formatCount(total)} more events`,
    ...(rows.length > 0 ? alignedLines(['column', 'add'], rows, [1]) : []),
  ];
  return { json, lines };
}

function campaignAnswer(analysis: Analysis, events: number): Answer {
  const { influence } = analysis.audit.deep!;
  const [measured, optimal] = (['measured', 'optimal'] as const).map((spread) =>
    planCampaign(analysis, influence, events, spread),
  ) as [Campaign | { reason: string }, Campaign | { reason: string }];
  if ('reason' in measured) return { json: { events, reason: measured.reason }, lines: [measured.reason] };
  if ('reason' in optimal) return { json: { events, reason: optimal.reason }, lines: [optimal.reason] };
  const lists = ({ added, before, after }: Campaign) => ({ add: [...added], before, after });
  const rows = analysis.tally.columnNames.map((name, j) => [
    name,
    formatCount(measured.added[j]!),
    formatCount(optimal.added[j]!),
  ]);
  const ratio = (text: string, ratios: readonly (number | null)[]): string[] => {
    const known = ratios.filter((one) => one !== null);
    return [text, formatNumber(sumOf(known) / known.length, 2), formatNumber(Math.max(...known), 2)];
  };
  const lines = [
    `${formatCount(events)} more events: variance from the matrix over that of the data to come, over the reconstructed bins`,
    ...alignedLines(
      ['', 'mean', 'largest'],
      [
        ratio('now', measured.before),
        ratio('spread as measured', measured.after),
        ratio('spread where they pay most', optimal.after),
      ],
      [1, 2],
    ),
    ...alignedLines(['column', 'as measured', 'where they pay most'], rows, [1, 2]),
  ];
  return { json: { events, measured: lists(measured), optimal: lists(optimal) }, lines };
}

/** What the limits of the study ask for, as in the report. */
function limitsAnswer(analysis: Analysis): Answer {
  const { audit, reference, tally } = analysis;
  const { influence } = audit.deep!;
  const next = planNext(analysis, reference, influence, audit.flags);
  const list = (values: Float64Array): number[] => [...values];
  const json = {
    events: list(next.events),
    populate: list(next.populate),
    reference: isAbsent(influence.ratio) ? { reason: influence.ratio.reason } : list(next.influence),
    needed: list(next.needed),
    all: list(next.all),
    settlements: next.settlements.map(({ flag, plan: { total, reason, added }, isAffordable }) => ({
      id: flag.id,
      column: flag.column,
      bin: flag.bin,
      add: added && list(added),
      total,
      reason,
      inAll: isAffordable,
    })),
  };
  return { json, lines: [...neededLines(next, tally.columnNames), ...settlementLines(next)] };
}

function neededLines({ events, populate, influence, needed, all }: MeasurePlan, columns: readonly string[]): string[] {
  const number = (n: number): string => (n > 0 ? formatEvents(n) : '');
  const rows = columns.flatMap((name, j) => {
    if (all[j] === 0) return [];
    const numbers = [populate, influence, needed, all].map((list) => number(list[j]!));
    return [[name, formatCount(events[j]!), ...numbers]];
  });
  const needs = sumOf(needed);
  const total = needs > 0 ? `${formatEvents(needs)} more events` : 'no more events';
  return [
    `needed: ${total}, so that no column is empty, thin or led by the prior, and no reconstructed bin limited by the matrix`,
    ...(rows.length > 0
      ? alignedLines(
          ['column', 'now', 'to populate', 'for the reference', 'needed', 'and to settle'],
          rows,
          [1, 2, 3, 4, 5],
        )
      : []),
  ];
}

function settlementLines({ settlements }: MeasurePlan): string[] {
  if (settlements.length === 0) return [];
  const rows = settlements.map(({ flag, plan: { total, reason }, isAffordable }) => [
    `○ ${flag.id}`,
    flag.column ?? (flag.bin === null ? '' : `bin ${flag.bin}`),
    total === null ? '' : formatEvents(total),
    total === null ? reason! : isAffordable ? '' : 'more than the whole calibration',
  ]);
  return [
    'undecided answers and the events that are expected to settle them:',
    ...alignedLines(['', '', 'add', ''], rows, [2]),
  ];
}
