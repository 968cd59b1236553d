import { conditionalsOf, shareOut } from '../numerics/multinomial-variate';
import type { RandomStream } from '../numerics/random';
import { betaVariate } from './draws';

/**
 * Model of untagged data: `y_k ~ Poisson(sum_j s_j p[j, k])` for the outcomes that data show, `s_j ~ Gamma(priorShape, rate_j)`,
 * `p_j ~ Dirichlet(shape_j)` under its calibration. Matrices are `[columns, outcomes]`, C order; `shown` lists the outcomes that data
 * show, the others (`below`, `above`, `lost`) are imputed.
 */
export interface UntaggedModel {
  columns: number;
  outcomes: number;
  shape: Float64Array;
  shown: readonly number[];
  priorShape: number;
  /** `[columns]`, above 0. */
  rate: Float64Array;
}

/** Where a chain stands. */
export interface GibbsState {
  /** `[columns]`: expected events of each true bin. */
  contents: Float64Array;
  /** `[columns, outcomes]`. */
  matrix: Float64Array;
}

/** The least probability a draw of the matrix gives: a cell that data hit must stay able to hold them. */
export const LEAST_PROBABILITY = 1e-300;

/** Mean of each column's calibration posterior. */
export function meanMatrix({ columns, outcomes, shape }: UntaggedModel): Float64Array {
  const mean = new Float64Array(columns * outcomes);
  for (let j = 0; j < columns; j++) {
    const row = shape.subarray(j * outcomes, (j + 1) * outcomes);
    const total = row.reduce((a, b) => a + b, 0);
    row.forEach((a, k) => (mean[j * outcomes + k] = a / total));
  }
  return mean;
}

/** Fills `out` with a matrix of independent Dirichlet columns of the given shapes plus `more` (0 where `null`). */
export function drawMatrix(
  model: UntaggedModel,
  more: Float64Array | null,
  stream: RandomStream,
  out: Float64Array,
): void {
  const { columns, outcomes, shape } = model;
  for (let j = 0; j < columns; j++) {
    let total = 0;
    for (let i = j * outcomes; i < (j + 1) * outcomes; i++) {
      const a = shape[i]! + (more ? more[i]! : 0);
      total += out[i] = a > 0 ? Math.max(LEAST_PROBABILITY, stream.gamma(a)) : 0;
    }
    for (let i = j * outcomes; i < (j + 1) * outcomes; i++) out[i]! /= total;
  }
}

/** Contents from their prior. */
export function drawContents({ columns, priorShape, rate }: UntaggedModel, stream: RandomStream): Float64Array {
  return new Float64Array(columns).map((_, j) => stream.gamma(priorShape) / rate[j]!);
}

/** Data of a campaign without tags: one Poisson variate a shown outcome. */
export function drawData(model: UntaggedModel, { contents, matrix }: GibbsState, stream: RandomStream): Float64Array {
  return Float64Array.from(model.shown, (k) => {
    let mean = 0;
    for (let j = 0; j < model.columns; j++) mean += contents[j]! * matrix[j * model.outcomes + k]!;
    return stream.poisson(mean);
  });
}

/** Sweeps over the contents and, where it is free, the matrix of one chain. */
export interface Sweeper {
  sweep(state: GibbsState, stream: RandomStream): void;
}

/**
 * The data-augmented Gibbs sampler (Tanner & Wong, JASA 82 (1987) 528, from memory) for given data, `[shown]`: each `y_k` is allocated to
 * columns by a multinomial with weights `s_j p[j, k]`, then contents and probabilities are drawn given the allocations.
 *
 * What data cannot show is integrated out and not imputed, which would tie `s_j` to the losses and mix slowly: with `N` events
 * allocated to column `j` and `e` its probability of being shown, `s_j ~ Gamma(a + N, b + e)`. Where the matrix is free, the shares among
 * shown and among hidden outcomes are Dirichlet, and `e` has the density of `drawShown`. The law of contents and matrix is the
 * same as with imputed losses.
 */
export function sweeper(model: UntaggedModel, data: Float64Array, isFree: boolean): Sweeper {
  const { columns, outcomes, shown, priorShape, rate, shape } = model;
  const counts = new Float64Array(columns * outcomes);
  const scratch = [0, 1, 2].map(() => new Float64Array(columns)) as [Float64Array, Float64Array, Float64Array];
  const hidden = [...Array(outcomes).keys()].filter((k) => !shown.includes(k));
  const sum = (values: Float64Array, j: number, places: readonly number[]): number => {
    let total = 0;
    for (let i = 0; i < places.length; i++) total += values[j * outcomes + places[i]!]!;
    return total;
  };
  const shapes = Array.from({ length: columns }, (_, j) => ({ a: sum(shape, j, shown), b: sum(shape, j, hidden) }));
  const sweep = (state: GibbsState, stream: RandomStream): void => {
    allocate(model, data, state, stream, counts, scratch);
    for (let j = 0; j < columns; j++) {
      const n = sum(counts, j, shown);
      const e = isFree ? drawShown(shapes[j]!, n, priorShape, rate[j]!, stream) : sum(state.matrix, j, shown);
      state.contents[j] = stream.gamma(priorShape + n) / (rate[j]! + e);
      if (!isFree) continue;
      drawShares(model, j, shown, e, counts, stream, state.matrix);
      drawShares(model, j, hidden, 1 - e, counts, stream, state.matrix);
    }
  };
  return { sweep };
}

/** Shares the events of each shown outcome out over the columns, into `counts`; hidden outcomes stay at 0. */
function allocate(
  { columns, outcomes, shown }: UntaggedModel,
  data: Float64Array,
  { contents, matrix }: GibbsState,
  stream: RandomStream,
  counts: Float64Array,
  [weights, conditionals, shared]: [Float64Array, Float64Array, Float64Array],
): void {
  for (let i = 0; i < shown.length; i++) {
    const k = shown[i]!;
    for (let j = 0; j < columns; j++) weights[j] = contents[j]! * matrix[j * outcomes + k]!;
    shareOut(stream, data[i]!, conditionalsOf(weights, conditionals), shared);
    for (let j = 0; j < columns; j++) counts[j * outcomes + k] = shared[j]!;
  }
}

/** Turns of the search for a proposal: near enough after four, and any proposal is exact. */
const PROPOSAL_TURNS = 4;

/**
 * The probability `e` of being shown given `n` allocated events, the content integrated out: with calibration `Beta(a, b)`, prior shape
 * `s` and rate `r` its density is `e^(a + n - 1) (1 - e)^(b - 1) (r + e)^-(s + n)`. Drawn by rejection from `Beta(a - c + t, b)` with `c = min(s, a / 2)`
 * and the tilt `t >= 0` that puts the peak of the rest, `e^(n + c - t) (r + e)^-(n + s)`, at the proposal's mean.
 */
export function drawShown(
  { a, b }: { a: number; b: number },
  n: number,
  priorShape: number,
  rate: number,
  stream: RandomStream,
): number {
  if (b === 0 || a === 0) return a === 0 ? 0 : 1;
  const c = Math.min(priorShape, a / 2);
  const falling = n + priorShape;
  let tilt = 0;
  for (let turn = 0, e = a / (a + b); turn < PROPOSAL_TURNS; turn++) {
    tilt = Math.max(0, n + c - (falling * e) / (rate + e));
    e = (a - c + tilt) / (a - c + tilt + b);
  }
  const rising = n + c - tilt;
  const peak = falling > rising ? Math.min(1, (rising * rate) / (falling - rising)) : 1;
  for (;;) {
    const e = betaVariate(stream, { a: a - c + tilt, b, method: 'exact' });
    const log = rising * Math.log(e / peak) - falling * Math.log((rate + e) / (rate + peak));
    if (-stream.exponential() <= log) return e;
  }
}

/** Fills the `places` of column `j` with a Dirichlet of its shapes and counts, times `total`. */
function drawShares(
  { outcomes, shape }: UntaggedModel,
  j: number,
  places: readonly number[],
  total: number,
  counts: Float64Array,
  stream: RandomStream,
  out: Float64Array,
): void {
  let sum = 0;
  for (let i = 0; i < places.length; i++) {
    const at = j * outcomes + places[i]!;
    const a = shape[at]! + counts[at]!;
    sum += out[at] = a > 0 ? Math.max(LEAST_PROBABILITY, stream.gamma(a)) : 0;
  }
  if (sum > 0) for (let i = 0; i < places.length; i++) out[j * outcomes + places[i]!]! *= total / sum;
}
