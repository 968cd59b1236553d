import { exp, log } from '../numerics/exp-log';
import { fillVariatesAbove, logGammaVariate } from '../numerics/gamma-variate';
import { PURPOSE, streamOf, type RandomStream } from '../numerics/random';
import { fillExponentials, fillHalfNormals } from '../numerics/ziggurat';
import { InputError } from '../study/input-error';
import { planColumn, Workspace, type ColumnPlan } from './column-plan';
import { QuickColumns } from './quick-columns';

/** Replicas of a block. A column's stream of random numbers begins anew with every block: part of the bundle's contract. */
export const BLOCK = 32;

/** What an ensemble is drawn from: gamma shapes, and scales where events are weighted, both `[column, outcome]`, C order. */
export interface SamplerParameters {
  columns: number;
  outcomes: number;
  /** 0 (the outcome has probability 0), or from `SMALLEST_SHAPE` up. */
  shape: Float64Array;
  /** Above 0; `null` where every weight is one and the columns are Dirichlet. */
  scale: Float64Array | null;
}

export interface EnsemblePlan {
  outcomes: number;
  columns: ColumnPlan[];
  /** `null` where the system grants no memory for it: the columns are then drawn here. */
  quick: QuickColumns | null;
}

/**
 * Everything about an ensemble that is the same for all replicas, made once a worker.
 * Throws `InputError` for a column without a shape above 0, `RangeError` for shapes and scales out of range.
 */
export function planEnsemble({ columns, outcomes, shape, scale }: SamplerParameters): EnsemblePlan {
  const work = new Workspace(outcomes);
  const row = (all: Float64Array, column: number): Float64Array =>
    all.subarray(column * outcomes, (column + 1) * outcomes);
  return {
    outcomes,
    quick: QuickColumns.over(outcomes, BLOCK),
    columns: Array.from({ length: columns }, (_, column) => {
      const shapes = row(shape, column);
      if (shapes.every((a) => a === 0)) throw withoutPosterior(column);
      return planColumn(shapes, scale && row(scale, column), work);
    }),
  };
}

function withoutPosterior(column: number): InputError {
  return new InputError(
    `column ${column}`,
    'no event and no pseudo-count: nothing to draw from',
    'give it a pseudo-count above 0',
  );
}

/**
 * Draws the first `replicas` (at most `BLOCK`) of a block into `out`, `[replica, column, outcome]` in C order; of the
 * columns `[first, end)` alone, `[replica, end - first, outcome]`, where they are given. Each column is scaled gamma
 * variates over their sum: it adds up to 1 within 1e-12. It depends on `(seed, its index, block)` and its own parameters alone,
 * and fewer replicas are the beginning of more. Throws `RangeError` where `out` or `BLOCK` is too small.
 */
export function drawBlock(
  plan: EnsemblePlan,
  seed: number,
  block: number,
  replicas: number,
  out: Float64Array,
  first = 0,
  end = plan.columns.length,
): void {
  const stride = (end - first) * plan.outcomes;
  if (replicas > BLOCK || out.length < replicas * stride)
    throw new RangeError(`no room for ${replicas} replicas of ${stride} cells`);
  for (let column = first; column < end; column++) {
    const columnPlan = plan.columns[column]!;
    const stream = streamOf(seed, PURPOSE.ensemble, column, block);
    const at = (column - first) * plan.outcomes;
    if (plan.quick && !columnPlan.inLogs) {
      plan.quick.draw(columnPlan, stream.state, replicas, out, at, stride);
      continue;
    }
    for (let replica = 0; replica < replicas; replica++) drawColumn(columnPlan, stream, out, at + replica * stride);
  }
}

function drawColumn(plan: ColumnPlan, stream: RandomStream, out: Float64Array, at: number): void {
  if (plan.inLogs) fillFromLogs(plan, stream);
  else fillVariates(plan, stream);
  if (plan.cells.length < plan.outcomes) out.fill(0, at, at + plan.outcomes);
  place(plan.cells, plan.variates, 1 / sum(plan.variates), out, at);
}

function place(cells: Int32Array, variates: Float64Array, unit: number, out: Float64Array, at: number): void {
  for (let i = 0; i < cells.length; i++) out[at + cells[i]!] = variates[i]! * unit;
}

function fillVariates(plan: ColumnPlan, stream: RandomStream): void {
  fillHalfNormals(stream, plan.halves, plan.room);
  halveSquares(plan.halves);
  fillExponentials(stream, plan.ones, plan.room);
  fillVariatesAbove(stream, plan.offset, plan.slope, plan.others, plan.room);
  if (plan.below.length > 0) boost(plan, stream);
  if (plan.scale) multiply(plan.variates, plan.scale);
}

function halveSquares(values: Float64Array): void {
  for (let i = 0; i < values.length; i++) values[i] = 0.5 * values[i]! * values[i]!;
}

/** Marsaglia and Tsang's step below shape 1: times `U^(1/a)`, which is `exp(-E/a)` with `E` exponential. */
function boost({ below, exponentials, reciprocal, room }: ColumnPlan, stream: RandomStream): void {
  fillExponentials(stream, exponentials, room);
  for (let i = 0; i < below.length; i++) below[i]! *= exp(-exponentials[i]! * reciprocal[i]!);
}

function multiply(values: Float64Array, factors: Float64Array): void {
  for (let i = 0; i < values.length; i++) values[i]! *= factors[i]!;
}

/** Logarithms of the variates, brought to a largest variate of 1. */
function fillFromLogs({ variates, shape, scale }: ColumnPlan, stream: RandomStream): void {
  for (let i = 0; i < variates.length; i++) {
    variates[i] = logGammaVariate(stream, shape[i]!) + (scale ? log(scale[i]!) : 0);
  }
  const most = variates.reduce((a, b) => Math.max(a, b));
  for (let i = 0; i < variates.length; i++) variates[i] = exp(variates[i]! - most);
}

/** In two strands, because an addition waits for the one before it. */
function sum(values: Float64Array): number {
  let even = 0;
  let odd = 0;
  const pairs = values.length - (values.length % 2);
  for (let i = 0; i < pairs; i += 2) {
    even += values[i]!;
    odd += values[i + 1]!;
  }
  return even + odd + (pairs < values.length ? values[pairs]! : 0);
}
