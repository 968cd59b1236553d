import { equalTailed } from '../posterior/intervals';
import { matchedDirichlet } from '../posterior/matched-dirichlet';
import { hasNoPosterior } from '../posterior/posterior';
import { binRange } from '../study/axis';
import { columnEvents, outcomePlaces, type AuditInput } from './audit-input';
import { columnShare, type ColumnShare } from './column-share';
import type { Flag } from './flag';
import { cellMoments, fold } from './folding';
import type { Influence } from './influence';
import { isAbsent } from './measure';
import type { ReferenceSpectrum } from './reference';
import { entriesToSettle, growthToSettle } from './settling';
import { bestAddition, leastAddition, type Columns } from './spreading';
import { normalQuantile } from '../numerics/normal';

/** Events to add to each column, whole numbers in the order of the columns; or why there is no such plan. */
export type Plan = { added: Float64Array; total: number; reason: null } | { added: null; total: null; reason: string };

/** What a campaign of more events would bring. */
export interface Campaign {
  added: Float64Array;
  /** Matrix variance over data variance, `[bins]`, before and after; `null` where the reference spectrum gives a bin nothing. */
  before: (number | null)[];
  after: (number | null)[];
}

const noPlan = (reason: string): Plan => ({ added: null, total: null, reason });

function planOf(added: Float64Array): Plan {
  const whole = added.map((n) => Math.ceil(n));
  return { added: whole, total: whole.reduce((a, b) => a + b, 0), reason: null };
}

/**
 * What a column's variances depend on: they fall as one over `A + 1`, `A` the total of its Dirichlet (of the matched one where
 * it is weighted), which an added event raises by the column's effective entries an event (1 where it has none yet).
 */
function columnsOf(input: AuditInput): Columns {
  const { posterior } = input;
  const events = columnEvents(input);
  const totals = events.map((_, j) => {
    if (hasNoPosterior(posterior, j)) return 1;
    return 1 + matchedDirichlet(posterior, j).reduce((a, b) => a + b, 0);
  });
  const growth = events.map((n, j) => (n > 0 && posterior.effective[j]! > 0 ? posterior.effective[j]! / n : 1));
  return { totals, growth };
}

/**
 * The fewest events after which the matrix's share of the variance, `matrix / (matrix + data)`, is at most `share` in every
 * reconstructed bin (or in `bins` alone, by place). Variances are taken at the upper ends of their intervals, so that the target is
 * met with the credibility of the study and not in half of all cases.
 */
export function planMatrixShare(input: AuditInput, influence: Influence, share: number, bins?: number[]): Plan {
  const { ratio, folded, contributions } = influence;
  if (isAbsent(ratio) || isAbsent(folded) || !contributions)
    return noPlan(isAbsent(ratio) ? ratio.reason : 'no influence');
  if (!(share > 0 && share < 1)) return noPlan('a matrix share must lie between 0 and 1');
  const all = ratio.value.length;
  const wanted = (bins ?? [...Array(all).keys()]).filter((i) => ratio.value[i] !== null && ratio.value[i]! > 0);
  const columns = columnsOf(input);
  const c = new Float64Array(columns.totals.length * wanted.length);
  columns.totals.forEach((total, j) => {
    wanted.forEach((i, k) => (c[j * wanted.length + k] = contributions[j * all + i]! * total));
  });
  const bound = Float64Array.from(wanted, (i) => {
    const caution = Math.max(1, (ratio.upper[i] ?? ratio.value[i]!) / ratio.value[i]!);
    return (folded.value[i]! * share) / (1 - share) / caution;
  });
  return planOf(leastAddition(columns, c, bound));
}

/**
 * The fewest events after which the efficiency of every column that has events is known to the relative sd `target`:
 * `sd / e = sqrt((1 - e) / (e (A + 1)))`, with `e` at the lower end of its interval.
 */
export function planEfficiency(input: AuditInput, target: number): Plan {
  const { lost } = outcomePlaces(input);
  if (lost === null) return noPlan('losses are not recorded, so efficiency is not measurable');
  if (!(target > 0)) return noPlan('a relative sd must be above 0');
  const all = [...input.tally.outcomeNames.keys()];
  const kept = all.filter((k) => k !== lost);
  const added = Float64Array.from(input.tally.columnNames, (_, j) => {
    const known = columnShare(input, j, kept, all);
    if (!known || known.inside === 0) return 0;
    const { a, b } = known.marginal;
    const least = equalTailed(known.marginal, input.study.credibility).lower;
    return Math.max(0, (1 - least) / (least * target ** 2) - (a + b + 1)) / known.growth;
  });
  return planOf(added);
}

/** What `events` more would bring: spread as measured, or so that the mean of `matrix / data` variance over the bins is least. */
export function planCampaign(
  input: AuditInput,
  influence: Influence,
  events: number,
  spread: 'measured' | 'optimal',
): Campaign | { reason: string } {
  const { ratio, folded, contributions } = influence;
  if (isAbsent(ratio) || isAbsent(folded) || !contributions)
    return { reason: isAbsent(ratio) ? ratio.reason : 'no influence' };
  const columns = columnsOf(input);
  const weights = columns.totals.map((total, j) =>
    ratio.value.reduce<number>((sum, known, i) => {
      return known === null ? sum : sum + (contributions[j * ratio.value.length + i]! * total) / folded.value[i]!;
    }, 0),
  );
  const now = columnEvents(input);
  const added = wholeNumbers(
    spread === 'measured' ? inProportion(now, events) : bestAddition(columns, weights, events),
    events,
  );
  const after = ratio.value.map((known, i) => {
    if (known === null) return null;
    let variance = 0;
    columns.totals.forEach((total, j) => {
      const later = total + columns.growth[j]! * added[j]!;
      variance += (contributions[j * ratio.value.length + i]! * total) / later;
    });
    return variance / folded.value[i]!;
  });
  return { added, before: [...ratio.value], after };
}

function inProportion(now: Float64Array, events: number): Float64Array {
  const all = now.reduce((a, b) => a + b, 0);
  return now.map((n) => (all > 0 ? (events * n) / all : events / now.length));
}

/** Whole numbers of the same sum: each rounded down, the rest to the largest remainders. */
function wholeNumbers(values: Float64Array, sum: number): Float64Array {
  const whole = values.map(Math.floor);
  let left = Math.round(sum - whole.reduce((a, b) => a + b, 0));
  const order = [...values.keys()].sort((a, b) => values[b]! - whole[b]! - (values[a]! - whole[a]!));
  for (const j of order) if (left-- > 0) whole[j]!++;
  return whole;
}

/**
 * Events to add to each column so that an undecided flag is expected to be settled: with probability `ASSURANCE` under the
 * present posterior, whichever way. Shares of a column (`lossy`, `spill-below`, `spill-above`, `unstable`) by their Beta; shares of a bin
 * (`feed-in`, `impure`) by the columns that their variance comes from; `matrix-limited` until it is clear; `non-monotone` by both columns.
 */
export function planFlag(input: AuditInput, reference: ReferenceSpectrum, influence: Influence, flag: Flag): Plan {
  if (flag.state !== 'undecided') return noPlan(`the flag is ${flag.state}`);
  if (flag.value === null) return noPlan(flag.evidence);
  const { trueAxis, tally } = input;
  const j = tally.columnNames.indexOf(flag.column ?? '');
  const k = tally.outcomeNames.indexOf(flag.bin ?? '');
  const { first, end } = binRange(trueAxis);
  switch (flag.id) {
    case 'lossy':
    case 'spill-below':
    case 'spill-above':
    case 'unstable':
      return planShare(input, flag, j);
    case 'feed-in':
      return planBinShare(input, reference, flag, k, (column) => column < first || column >= end);
    case 'impure':
      return planBinShare(input, reference, flag, k, (column) => column === k);
    case 'matrix-limited':
      return planClear(input, influence, flag, outcomePlaces(input).window.indexOf(k));
    case 'non-monotone':
      return planGrowth(input, flag, [j - 1, j]);
    default:
      return noPlan('more events of the same kind do not settle it');
  }
}

function planShare(input: AuditInput, flag: Flag, j: number): Plan {
  const share = shareBehind(input, flag, j);
  if (!share) return noPlan(flag.evidence);
  const entries = entriesToSettle(share.marginal, flag.limit, input.study.credibility);
  if (entries === null) return noPlan('the share is too close to the limit for any feasible number of events');
  const added = new Float64Array(input.posterior.columns);
  added[j] = entries / share.growth;
  return planOf(added);
}

function shareBehind(input: AuditInput, flag: Flag, j: number): ColumnShare | null {
  const places = outcomePlaces(input);
  const all = [...input.tally.outcomeNames.keys()];
  switch (flag.id) {
    case 'lossy':
      return columnShare(
        input,
        j,
        all.filter((k) => k !== places.lost),
        all,
      );
    case 'spill-below':
      return columnShare(input, j, [places.below!], all);
    case 'spill-above':
      return columnShare(input, j, [places.above!], all);
    default:
      return columnShare(input, j, [j], places.window);
  }
}

/** Until a bin is no longer limited by the matrix: the later interval, as wide in proportion as the present one, shall be clear too. */
function planClear(input: AuditInput, influence: Influence, flag: Flag, bin: number): Plan {
  const limit = flag.limit / Math.max(1, flag.upper! / flag.value!);
  return planMatrixShare(input, influence, limit / (1 + limit), [bin]);
}

/** A share `F` of bin `k` that `chosen` columns make of it: `dF / dp_jk = s_j (1 or 0 - F) / mu`, columns independent. */
function planBinShare(
  input: AuditInput,
  { contents }: ReferenceSpectrum,
  flag: Flag,
  k: number,
  chosen: (column: number) => boolean,
): Plan {
  const { mean, variance } = cellMoments(input.posterior);
  const all = fold(contents, mean, [k])[0]!;
  const share = fold(contents, mean, [k], chosen)[0]! / all;
  const columns = columnsOf(input);
  const parts = columns.totals.map((_, j) => {
    const slope = (contents[j]! * (Number(chosen(j)) - share)) / all;
    return slope ** 2 * variance[j * input.posterior.outcomes + k]!;
  });
  const sd = Math.sqrt(parts.reduce((a, b) => a + b, 0));
  const growth = growthToSettle(share, sd, flag.limit, input.study.credibility);
  if (growth === null) return noPlan('the share is too close to the limit for any feasible number of events');
  return planOf(
    leastAddition(
      columns,
      parts.map((part, j) => part * columns.totals[j]!),
      Float64Array.of(sd ** 2 / growth),
    ),
  );
}

/** All of `columns` grown alike, for a measure whose sd is known by its interval alone. */
function planGrowth(input: AuditInput, flag: Flag, columns: number[]): Plan {
  const reach = 2 * normalQuantile((1 + input.study.credibility) / 2);
  const growth = growthToSettle(flag.value!, (flag.upper! - flag.lower!) / reach, flag.limit, input.study.credibility);
  if (growth === null) return noPlan('the measure is too close to the limit for any feasible number of events');
  return planOf(columnEvents(input).map((n, j) => (columns.includes(j) ? (growth - 1) * n : 0)));
}
