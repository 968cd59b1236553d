import { columnEvents, type AuditInput } from './audit-input';
import { countFlag } from './count-flag';
import type { Findings } from './findings';
import type { Flag } from './flag';
import { listMeasure } from './measure';
import { countOf, eventsOf, formatNumber, formatPercent } from './wording';

/** Effective entries and prior share of every column, and the flags `empty`, `thin` and `prior-led`. */
export function auditPopulation(input: AuditInput): Findings {
  const events = columnEvents(input);
  const { columnNames } = input.tally;
  const columns = columnNames.map((column, j) => populationOf(input, column, j, events[j]!));
  const exact = (value: number) => ({ value, lower: null, upper: null });
  return {
    columns: {
      effectiveEntries: listMeasure(
        columnNames,
        columns.map(({ effective }) => exact(effective)),
      ),
      priorShare: listMeasure(
        columnNames,
        columns.map(({ priorShare }) => exact(priorShare)),
      ),
    },
    flags: [...columns.map(emptyFlag), ...columns.map(thinFlag), ...columns.map(priorFlag)],
  };
}

/**
 * Events to add to each column, `[columns]`, that lift `empty`, `thin` and `prior-led` if they are like those it has; 0 where none
 * of them is raised, `Infinity` where no number lifts a limit of 0 on the prior's share.
 */
export function eventsToPopulate(input: AuditInput): Float64Array {
  const events = columnEvents(input);
  return events.map((n, j) => Math.ceil(eventsMissing(populationOf(input, '', j, n))));
}

function eventsMissing({ effective, prior, growth, limits }: Population): number {
  return Math.max(0, limits.thin - effective, entriesAgainst(prior, limits.priorLed) - effective) / growth;
}

interface Population {
  column: string;
  events: number;
  effective: number;
  /** Pseudo-counts of the prior, summed. */
  prior: number;
  /** `prior / (prior + effective)`; 1 where both are zero, as for a prior however light. */
  priorShare: number;
  /** Effective entries that one more event brings. */
  growth: number;
  limits: { thin: number; priorLed: number };
}

function populationOf({ posterior, study }: AuditInput, column: string, j: number, events: number): Population {
  const { outcomes } = posterior;
  const effective = posterior.effective[j]!;
  const prior = posterior.prior.subarray(j * outcomes, (j + 1) * outcomes).reduce((sum, c) => sum + c, 0);
  const priorShare = effective > 0 ? prior / (prior + effective) : 1;
  const growth = effective > 0 ? effective / events : 1;
  const limits = { thin: study.limits.thin, priorLed: study.limits['prior-led'] };
  return { column, events, effective, prior, priorShare, growth, limits };
}

function emptyFlag(population: Population): Flag {
  const { column, events } = population;
  const needed = eventsMissing(population);
  return countFlag({
    id: 'empty',
    column,
    value: events,
    limit: 0,
    isBeyond: events === 0,
    evidence: events === 0 ? 'no events' : `${countOf(events, 'event')}`,
    remedy: `${Number.isFinite(needed) ? `add about ${eventsOf(needed)}` : 'add events'} to this column, or merge it with a neighbour`,
  });
}

function thinFlag({ column, events, effective, growth, limits }: Population): Flag {
  const missing = (limits.thin - effective) / growth;
  return countFlag({
    id: 'thin',
    column,
    value: effective,
    limit: limits.thin,
    isBeyond: effective < limits.thin,
    evidence: `${formatNumber(effective, 4)} effective entries from ${countOf(events, 'event')}`,
    remedy: `about ${eventsOf(missing, 'more ')} ${growth === 1 ? '' : 'of the same weights '}would bring it to ${formatNumber(limits.thin)}`,
  });
}

function priorFlag({ column, effective, prior, priorShare, growth, limits }: Population): Flag {
  const missing = (entriesAgainst(prior, limits.priorLed) - effective) / growth;
  const more = `about ${eventsOf(missing, 'more ')} would bring it to ${formatPercent(limits.priorLed)}, or choose a lighter prior`;
  return countFlag({
    id: 'prior-led',
    column,
    value: priorShare,
    limit: limits.priorLed,
    isBeyond: priorShare > limits.priorLed,
    evidence: `prior share ${formatPercent(priorShare)}: ${formatNumber(prior)} pseudo-counts against ${formatNumber(effective, 4)} effective entries`,
    remedy: Number.isFinite(missing) ? more : 'no number of events brings it to zero: choose a prior of zero',
  });
}

/** Effective entries at which a prior's share falls to a limit. */
function entriesAgainst(prior: number, limit: number): number {
  return prior === 0 ? 0 : (prior * (1 - limit)) / limit;
}
