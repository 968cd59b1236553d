import { columnOf } from '../posterior/posterior';
import { shareCovariances } from '../posterior/share-moments';
import { outcomePlaces, type AuditInput } from './audit-input';
import { intervalOfDraws } from './draws';
import { answer, type Flag } from './flag';
import { cellMoments, fold, whyNotFolded } from './folding';
import type { MatrixWatcher } from './matrix-draws';
import { listMeasure, type Measure, type Reading } from './measure';
import type { ReferenceSpectrum } from './reference';
import { formatEvents, formatInterval, formatNumber, formatPercent } from './wording';

/** Is the calibration statistics enough? The folded reference spectrum, its variance from the matrix and from the data to come. */
export interface Influence {
  /** Expected content of each reconstructed bin, with the interval that the matrix leaves it. */
  folded: Measure;
  matrixVariance: Measure;
  /** Poisson variance of the data to come: the folded content. */
  dataVariance: Measure;
  /** `matrixVariance / dataVariance`. */
  ratio: Measure;
  /** `[bins, bins]`: covariance of the folded content from the matrix; `null` where the measures are absent. */
  covariance: Float64Array | null;
  /** `[columns, bins]`: variance that each column adds; `null` where the measures are absent. */
  contributions: Float64Array | null;
  /** Columns by what they add to the ratios of all bins, largest first; shares sum to 1 (0 where there is no variance). */
  ranking: { column: string; share: number }[];
  flags: Flag[];
}

export interface InfluenceWatcher extends MatrixWatcher {
  result(): Influence;
}

/**
 * Influence of the matrix's uncertainty on the reference spectrum (statistics.md 6). Values are closed forms of the
 * posterior; columns are independent, so variances add: `C_kl = sum_j s_j^2 Cov(p_jk, p_jl)`. Intervals and probabilities are those of
 * the same variance at the replicas' probabilities, each cell's `Var / (m (1 - m))` kept: what it would be if that replica were true.
 */
export function influenceWatcher(input: AuditInput, reference: ReferenceSpectrum, replicas: number): InfluenceWatcher {
  const reason = whyNotFolded(input, reference);
  if (reason !== null) return { watch: () => undefined, result: () => absent(reason) };
  const { window } = outcomePlaces(input);
  const moments = cellMoments(input.posterior);
  const weights = variancePerSpread(reference.contents, moments);
  const draws = {
    folded: window.map(() => new Float64Array(replicas)),
    variance: window.map(() => new Float64Array(replicas)),
  };
  let watched = 0;
  return {
    watch: (matrix) => {
      fold(reference.contents, matrix, window).forEach((mu, i) => (draws.folded[i]![watched] = mu));
      varianceAt(matrix, weights, input.posterior.outcomes, window).forEach(
        (v, i) => (draws.variance[i]![watched] = v),
      );
      watched++;
    },
    result: () => influenceOf(input, reference, moments, draws),
  };
}

interface Moments {
  mean: Float64Array;
  variance: Float64Array;
}

/** `s_j^2 Var / (m (1 - m))` of every cell: what makes a variance of `p (1 - p)`. */
function variancePerSpread(contents: Float64Array, { mean, variance }: Moments): Float64Array {
  const outcomes = mean.length / contents.length;
  return variance.map((v, i) => {
    const s = contents[Math.floor(i / outcomes)]!;
    const m = mean[i]!;
    return m > 0 && m < 1 ? (s * s * v) / (m * (1 - m)) : 0;
  });
}

/** `sum_j weight p (1 - p)` of each bin. */
function varianceAt(matrix: Float64Array, weights: Float64Array, outcomes: number, window: number[]): Float64Array {
  const sum = new Float64Array(window.length);
  for (let from = 0; from < matrix.length; from += outcomes) {
    for (let i = 0; i < window.length; i++) {
      const at = from + window[i]!;
      sum[i]! += weights[at]! * matrix[at]! * (1 - matrix[at]!);
    }
  }
  return sum;
}

function absent(reason: string): Influence {
  const none = { value: null, reason } as const;
  const measures = { folded: none, matrixVariance: none, dataVariance: none, ratio: none };
  return { ...measures, covariance: null, contributions: null, ranking: [], flags: [] };
}

interface Draws {
  folded: Float64Array[];
  variance: Float64Array[];
}

function influenceOf(input: AuditInput, { contents }: ReferenceSpectrum, moments: Moments, draws: Draws): Influence {
  const { window } = outcomePlaces(input);
  const bins = window.map((k) => input.tally.outcomeNames[k]!);
  const folded = fold(contents, moments.mean, window);
  const contributions = contributionsOf(contents, moments.variance, window);
  const covariance = foldedCovariance(input, contents, window);
  const variances = folded.map((_, i) => covariance[i * window.length + i]!);
  const ratios = Array.from(folded, (mu, i) => (mu > 0 ? variances[i]! / mu : null));
  const ratioDraws = draws.variance.map((v, i) => v.map((x, r) => (x > 0 ? x / draws.folded[i]![r]! : 0)));
  const limit = input.study.limits['matrix-limited'];
  const beyond = ratioDraws.map((values) => values.filter((x) => x > limit).length / values.length);
  const interval = (values: Float64Array) => intervalOfDraws(values.slice(), input.study.credibility);
  const list = (values: readonly (number | null)[], spread: Float64Array[] | null): Measure =>
    listMeasure(
      bins,
      values.map((value, i): Reading => {
        if (value === null) return { reason: 'the reference spectrum gives this bin nothing' };
        return { value, ...(spread ? interval(spread[i]!) : { lower: null, upper: null }) };
      }),
    );
  const ranking = rankingOf(input, contributions, folded);
  const flags = bins.flatMap((bin, i) => {
    if (ratios[i] === null) return [];
    return [flagOf(input, bin, ratios[i]!, interval(ratioDraws[i]!), beyond[i]!, leaderOf(input, contributions, i))];
  });
  return {
    folded: list([...folded], draws.folded),
    matrixVariance: list([...variances], draws.variance),
    dataVariance: list([...folded], null),
    ratio: list(ratios, ratioDraws),
    covariance,
    contributions,
    ranking,
    flags,
  };
}

/** `s_j^2 Var p[j, k]`, `[columns, bins]`. */
function contributionsOf(contents: Float64Array, variance: Float64Array, window: number[]): Float64Array {
  const outcomes = variance.length / contents.length;
  const result = new Float64Array(contents.length * window.length);
  contents.forEach((s, j) => {
    window.forEach((k, i) => (result[j * window.length + i] = s * s * variance[j * outcomes + k]!));
  });
  return result;
}

function foldedCovariance({ posterior }: AuditInput, contents: Float64Array, window: number[]): Float64Array {
  const bins = window.length;
  const sum = new Float64Array(bins * bins);
  contents.forEach((s, j) => {
    if (!(s > 0)) return;
    const { shape, scale } = columnOf(posterior, j);
    const covariance = shareCovariances(shape, scale);
    for (let a = 0; a < bins; a++) {
      const row = window[a]! * posterior.outcomes;
      for (let b = 0; b < bins; b++) sum[a * bins + b]! += s * s * covariance[row + window[b]!]!;
    }
  });
  return sum;
}

function rankingOf({ tally }: AuditInput, contributions: Float64Array, folded: Float64Array): Influence['ranking'] {
  const bins = folded.length;
  const weights = tally.columnNames.map((_, j) =>
    folded.reduce((sum, mu, i) => (mu > 0 ? sum + contributions[j * bins + i]! / mu : sum), 0),
  );
  const all = weights.reduce((a, b) => a + b, 0);
  const shares = weights.map((weight, j) => ({ column: tally.columnNames[j]!, share: all > 0 ? weight / all : 0 }));
  return shares.sort((a, b) => b.share - a.share);
}

/** The column that adds most to the variance of a bin, and its share of it. */
function leaderOf({ tally }: AuditInput, contributions: Float64Array, bin: number): { column: string; share: number } {
  const bins = contributions.length / tally.columnNames.length;
  const parts = tally.columnNames.map((_, j) => contributions[j * bins + bin]!);
  const all = parts.reduce((a, b) => a + b, 0);
  const j = parts.reduce((best, part, j) => (part > parts[best]! ? j : best), 0);
  return { column: tally.columnNames[j]!, share: all > 0 ? parts[j]! / all : 0 };
}

function flagOf(
  { study, tally }: AuditInput,
  bin: string,
  value: number,
  interval: { lower: number; upper: number },
  probability: number,
  leader: { column: string; share: number },
): Flag {
  const limit = study.limits['matrix-limited'];
  const state = answer(probability, study.credibility);
  const most = `${formatPercent(leader.share, 2)} of it from column ${leader.column}`;
  const evidence = `variance from the matrix ${formatInterval(value, interval.lower, interval.upper)} times that of the data to come, ${most}`;
  // The matrix variance falls as one over the events: this brings even the upper end below the limit.
  const growth = interval.upper / limit;
  const events = tally.cells.events.reduce((a, b) => a + b, 0);
  const advice = `${formatNumber(growth, 2)} times the calibration events (${formatEvents((growth - 1) * events)} more, spread as now) would clear it; the planner spreads them better`;
  const place = { id: 'matrix-limited' as const, column: null, bin, limit };
  return { ...place, state, value, ...interval, probability, evidence, advice: state === 'clear' ? '' : advice };
}
