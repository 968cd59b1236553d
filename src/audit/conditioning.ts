import { Matrix, SingularValueDecomposition } from 'ml-matrix';
import { spectralNorm } from '../numerics/spectral-norm';
import { normalQuantile } from '../numerics/normal';
import { hasNoPosterior } from '../posterior/posterior';
import { binRange } from '../study/axis';
import { outcomePlaces, type AuditInput } from './audit-input';
import { quantileOfSorted } from './draws';
import type { Flag } from './flag';
import { cellMoments } from './folding';
import type { MatrixWatcher } from './matrix-draws';
import { listMeasure, type Measure, type Reading } from './measure';
import { MOST_GROWTH } from './settling';
import { formatCount, formatNumber } from './wording';

/** Can the matrix be inverted at all? */
export interface Conditioning {
  /** Of the window part of the mean matrix, largest first. */
  singularValues: Measure;
  /** How many of them are above the noise level. */
  resolvable: Measure;
  /** 95 % quantile of the spectral norm of (replica - mean); `null` where the measures are absent. */
  noise: number | null;
  /** Replicas behind the noise level, and behind the intervals of the singular values. */
  replicas: { noise: number; intervals: number };
  flags: Flag[];
}

export interface ConditioningWatcher extends MatrixWatcher {
  result(): Conditioning;
}

/** The quantile of the noise that statistics.md names. */
const NOISE_QUANTILE = 0.95;

/** Replicas whose singular values are worked out at the most: the sd behind an interval is then known to 11 %. */
export const MOST_DECOMPOSED = 40;
/** Below this the sd would be known to no better than 18 %: such a large matrix has no intervals. */
export const FEWEST_DECOMPOSED = 16;
/** Multiplications `rows x columns x the smaller of both` that all decompositions may take together, up to a small factor. */
const DECOMPOSITION_BUDGET = 6.5e7;
/** The larger side of a matrix that is decomposed at all: beyond, minutes would go by. */
export const LARGEST_SIDE = 1000;

/**
 * Singular values and resolvable components of the window part (true bins by reconstructed bins). A component is
 * resolvable where its singular value exceeds the noise level: by Weyl's inequality no singular value moves by more than the
 * spectral norm of the change. Intervals of singular values are normal, from mean and sd over replicas; small ones are lifted by
 * noise in every replica, so that an interval wholly above its value is one that is not resolved.
 */
export function conditioningWatcher(input: AuditInput, replicas: number): ConditioningWatcher {
  const window = windowOf(input);
  const reason = whyAbsent(input, window);
  if (reason !== null) return { watch: () => undefined, result: () => absent(reason) };
  const mean = window.part(cellMoments(input.posterior).mean);
  const norms = new Float64Array(replicas);
  const decomposed: Float64Array[] = [];
  const toDecompose = Math.min(replicas, decompositions(window));
  let watched = 0;
  return {
    watch: (matrix) => {
      const part = window.part(matrix);
      if (decomposed.length < toDecompose) decomposed.push(singularValuesOf(part, window));
      norms[watched++] = spectralNorm(
        part.map((p, i) => p - mean[i]!),
        window.rows,
        window.columns,
      );
    },
    result: () => conditioningOf(input, singularValuesOf(mean, window), decomposed, norms.sort()),
  };
}

interface Window {
  rows: number;
  columns: number;
  /** The `[rows, columns]` part of a `[columns, outcomes]` matrix: true bins by reconstructed bins. */
  part: (matrix: Float64Array) => Float64Array;
}

function windowOf(input: AuditInput): Window {
  const { first, end } = binRange(input.trueAxis);
  const bins = outcomePlaces(input).window;
  const { outcomes } = input.posterior;
  const [rows, columns] = [end - first, bins.length];
  const part = (matrix: Float64Array): Float64Array => {
    const result = new Float64Array(rows * columns);
    // The window's outcomes stand side by side.
    for (let r = 0; r < rows; r++) {
      const at = (first + r) * outcomes + bins[0]!;
      result.set(matrix.subarray(at, at + columns), r * columns);
    }
    return result;
  };
  return { rows, columns, part };
}

function whyAbsent({ trueAxis, tally, posterior }: AuditInput, { rows, columns }: Window): string | null {
  if (Math.max(rows, columns) > LARGEST_SIDE)
    return `more than ${LARGEST_SIDE} bins: a decomposition would take minutes`;
  const { first, end } = binRange(trueAxis);
  for (let j = first; j < end; j++) {
    if (hasNoPosterior(posterior, j)) return `column ${tally.columnNames[j]} has no events and a prior of zero`;
  }
  return null;
}

function absent(reason: string): Conditioning {
  const none = { value: null, reason } as const;
  return { singularValues: none, resolvable: none, noise: null, replicas: { noise: 0, intervals: 0 }, flags: [] };
}

function decompositions({ rows, columns }: Window): number {
  const affordable = Math.floor(DECOMPOSITION_BUDGET / (rows * columns * Math.min(rows, columns)));
  return affordable < FEWEST_DECOMPOSED ? 0 : Math.min(MOST_DECOMPOSED, affordable);
}

/** Singular values, largest first, `min(rows, columns)` of them. */
function singularValuesOf(part: Float64Array, { rows, columns }: Window): Float64Array {
  const matrix = Matrix.from1DArray(rows, columns, part);
  const none = { computeLeftSingularVectors: false, computeRightSingularVectors: false, autoTranspose: true };
  return Float64Array.from(new SingularValueDecomposition(matrix, none).diagonal.slice(0, Math.min(rows, columns)));
}

function conditioningOf(
  input: AuditInput,
  values: Float64Array,
  decomposed: Float64Array[],
  norms: Float64Array,
): Conditioning {
  const { credibility } = input.study;
  const { first, end } = binRange(input.trueAxis);
  const noise = quantileOfSorted(norms, NOISE_QUANTILE);
  const above = (level: number): number => values.filter((value) => value > level).length;
  const tail = (1 - credibility) / 2;
  const resolvable = {
    value: above(noise),
    lower: above(quantileOfSorted(norms, 1 - tail)),
    upper: above(quantileOfSorted(norms, tail)),
  };
  const readings = [...values].map((value, i): Reading => ({
    value,
    ...intervalOf(
      decomposed.map((all) => all[i]!),
      credibility,
    ),
  }));
  return {
    singularValues: listMeasure(
      [...values.keys()].map((i) => `component ${i + 1}`),
      readings,
    ),
    resolvable: listMeasure(['matrix'], [resolvable]),
    noise,
    replicas: { noise: norms.length, intervals: decomposed.length },
    flags: [flagOf(resolvable, end - first, values, noise)],
  };
}

function intervalOf(drawn: number[], credibility: number): { lower: number | null; upper: number | null } {
  if (drawn.length === 0) return { lower: null, upper: null };
  const mean = drawn.reduce((a, b) => a + b, 0) / drawn.length;
  const sd = Math.sqrt(drawn.reduce((sum, x) => sum + (x - mean) ** 2, 0) / (drawn.length - 1));
  const reach = normalQuantile((1 + credibility) / 2) * sd;
  return { lower: Math.max(0, mean - reach), upper: mean + reach };
}

function flagOf(
  resolvable: { value: number; lower: number; upper: number },
  bins: number,
  values: Float64Array,
  noise: number,
): Flag {
  const isFlagged = resolvable.value < bins;
  const least = values[values.length - 1]!;
  return {
    id: 'ill-conditioned',
    column: null,
    bin: null,
    state: isFlagged ? 'flagged' : 'clear',
    ...resolvable,
    limit: bins,
    // The noise level is a quantile already: there is no further probability to give.
    probability: null,
    evidence: `${resolvable.value} of ${bins} components above the noise level ${formatNumber(noise, 2)}; singular values from ${formatNumber(values[0]!)} to ${formatNumber(least)}`,
    advice: isFlagged ? adviceOf(resolvable.value, bins, values.length, noise / least) : '',
  };
}

/** `excess` is how far the noise level is above the least singular value; it falls as one over the root of the events. */
function adviceOf(resolvable: number, bins: number, components: number, excess: number): string {
  const merge = `merge true bins until about ${formatCount(Math.max(1, resolvable))} remain, or regularise the unfolding`;
  if (components < bins) return `${components} reconstructed bins cannot tell ${bins} true bins apart: ${merge}`;
  const growth = excess ** 2;
  if (!(growth < MOST_GROWTH)) return merge;
  return `${merge}; about ${formatNumber(growth, 2)} times the calibration events would resolve all`;
}
