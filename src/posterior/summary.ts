import { cellInterval, type Interval, type IntervalKind } from './intervals';
import { cellMarginals, momentsOf, type Marginal } from './marginal';
import { hasNoPosterior, type Posterior } from './posterior';

/**
 * Posterior summary of every cell. Arrays are `[columns, outcomes]`, C order.
 * A column without posterior (no events, a prior of zero) holds what an even prior says in the limit of no weight: mean
 * `1 / outcomes`, sd `sqrt(mean (1 - mean))`, interval `[0, 1]`; its method is `none`.
 */
export interface Summary {
  columns: number;
  outcomes: number;
  mean: Float64Array;
  sd: Float64Array;
  lower: Float64Array;
  upper: Float64Array;
  /** One a column: whether its intervals are those of its exact Beta marginals or of Betas matched to exact moments. */
  method: ('exact' | 'matched' | 'none')[];
}

/**
 * Means, standard deviations and intervals at `credibility` of all cells; `events` are the tally's, `[columns,
 * outcomes]`: a cell without any shows an upper limit.
 */
export function summarise(
  posterior: Posterior,
  events: Float64Array,
  credibility: number,
  kind: IntervalKind = 'equal-tailed',
): Summary {
  const { columns, outcomes } = posterior;
  const [mean, sd, lower, upper] = Array.from({ length: 4 }, () => new Float64Array(columns * outcomes));
  const summary: Summary = { columns, outcomes, mean: mean!, sd: sd!, lower: lower!, upper: upper!, method: [] };
  for (let j = 0; j < columns; j++) {
    if (hasNoPosterior(posterior, j)) fillUnknown(summary, j);
    else fillColumn(summary, posterior, j, events, credibility, kind);
  }
  return summary;
}

function fillColumn(
  summary: Summary,
  posterior: Posterior,
  j: number,
  events: Float64Array,
  credibility: number,
  kind: IntervalKind,
): void {
  const from = j * summary.outcomes;
  const seen = new Map<number, Known>();
  cellMarginals(posterior, j).forEach((marginal, k) => {
    const { mean, variance } = momentsOf(marginal);
    const { lower, upper } = remembered(seen, marginal, events[from + k]!, credibility, kind);
    summary.method[j] = marginal.method;
    summary.mean[from + k] = mean;
    summary.sd[from + k] = Math.sqrt(variance);
    summary.lower[from + k] = lower;
    summary.upper[from + k] = upper;
  });
}

type Known = Interval & Pick<Marginal, 'b'>;

/** Most cells of a column share their content, none or a few events: each content is worked out once. */
function remembered(
  seen: Map<number, Known>,
  marginal: Marginal,
  events: number,
  credibility: number,
  kind: IntervalKind,
): Interval {
  const key = events === 0 ? -marginal.a : marginal.a;
  const known = seen.get(key);
  if (known?.b === marginal.b) return known;
  const interval = cellInterval(marginal, events, credibility, kind);
  seen.set(key, { ...interval, b: marginal.b });
  return interval;
}

function fillUnknown(summary: Summary, j: number): void {
  const [from, end] = [j * summary.outcomes, (j + 1) * summary.outcomes];
  const mean = 1 / summary.outcomes;
  summary.mean.fill(mean, from, end);
  summary.sd.fill(Math.sqrt(mean * (1 - mean)), from, end);
  summary.lower.fill(0, from, end);
  summary.upper.fill(1, from, end);
  summary.method[j] = 'none';
}
