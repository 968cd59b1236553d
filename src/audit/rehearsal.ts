import { PURPOSE, streamOf } from '../numerics/random';
import { clopperPearson } from '../posterior/clopper-pearson';
import { matchedDirichlet } from '../posterior/matched-dirichlet';
import { columnOf } from '../posterior/posterior';
import { outcomePlaces, type AuditInput } from './audit-input';
import {
  drawContents,
  drawData,
  drawMatrix,
  meanMatrix,
  sweeper,
  type GibbsState,
  type UntaggedModel,
} from './augmented-gibbs';
import { effectiveDraws, splitRhat } from './chains';
import { quantileOfSorted } from './draws';
import { whyNotFolded } from './folding';
import type { ReferenceSpectrum } from './reference';

export interface RehearsalOptions {
  /** Invented campaigns. */
  repetitions: number;
  /** Chains of each inference, 2 at least. */
  chains: number;
  /**
   * Sweeps of each chain, a multiple of 4; the first half is discarded. While the split-chain R-hat of any content is above
   * `MIXED`, or it has fewer effective draws than `ENOUGH_DRAWS`, all sweeps so far are discarded and as many more are made.
   */
  sweeps: number;
  /** Sweeps at which an inference ends in any case. */
  mostSweeps: number;
  /** True spectra: the reference itself, or drawn from the prior of the inference (which then must cover as it says). */
  truth: 'reference' | 'prior';
  /** Shape of the Gamma prior of each content, whose mean is the reference's: 1 is an exponential. */
  priorShape: number;
}

export const REHEARSAL: RehearsalOptions = {
  repetitions: 50,
  chains: 4,
  sweeps: 1000,
  mostSweeps: 16_000,
  truth: 'reference',
  priorShape: 1,
};

/** Chains whose R-hat is above this have not mixed: where data by far outnumber the calibration, they need long. */
export const MIXED = 1.05;
/** Fewer effective draws than these put the ends of a 95 % interval off by a third of an sd and more. */
export const ENOUGH_DRAWS = 100;

/** The probabilities at which coverage is counted: one standard deviation of a normal, and 95 %. */
export const LEVELS = [0.682689492137086, 0.95] as const;

/** Share of campaigns whose interval held the truth, with the Clopper-Pearson interval of that share at 95 %. */
export interface Coverage {
  value: number;
  lower: number;
  upper: number;
}

/** One way of inferring, at the two levels of `LEVELS`. */
export interface WayOfInferring {
  coverage: [Coverage, Coverage];
  /** Mean full width of the intervals over the reference content. */
  width: [number, number];
}

export interface ColumnRehearsal {
  column: string;
  /** Matrix fixed at its mean, and free under its posterior. */
  fixed: WayOfInferring;
  free: WayOfInferring;
  /** Root of (summed variance of the column's probabilities with the untagged data / without): below 1 where these narrowed it. */
  narrowed: number;
}

/** A check of the matrix against its use; not a result of unfolding. */
export interface Rehearsal {
  options: RehearsalOptions;
  /** Columns with content, true bins and outer ones. */
  columns: ColumnRehearsal[];
  /** Over all columns: mean coverage at the two levels, with its standard error over the campaigns. */
  overall: Record<'fixed' | 'free', { coverage: [number, number]; error: [number, number] }>;
  /**
   * Of every content in every inference: the largest split-chain R-hat and the fewest effective draws; and the share of
   * inferences that ended by `mostSweeps` before they had mixed, whose coverage is not to be trusted.
   */
  convergence: { rhat: number; effectiveDraws: number; unmixed: number };
  /** True where weighted columns stand for themselves by their matched Dirichlet. */
  isMatched: boolean;
}

/**
 * Rehearses the use of the matrix (statistics.md 8): a replica held out as the truth and a true spectrum make Poisson data; the
 * spectrum is inferred with the matrix fixed at its mean, and jointly with the matrix free under its posterior. Yields the share of
 * campaigns done after each, so that a caller can show it and stop; one stream of random numbers a campaign and chain.
 * Columns without reference content take no part. On a tag axis contents are class normalisations. Returns a reason where the
 * reference cannot be folded; throws `RangeError` for options out of range.
 */
export function* rehearse(
  input: AuditInput,
  reference: ReferenceSpectrum,
  options: RehearsalOptions = REHEARSAL,
): Generator<number, Rehearsal | { reason: string }> {
  checkOptions(options);
  const reason = whyNotFolded(input, reference);
  if (reason !== null) return { reason };
  const stage = stageOf(input, reference, options);
  for (let r = 0; r < options.repetitions; r++) {
    playCampaign(stage, r);
    yield (r + 1) / options.repetitions;
  }
  return reportOf(stage);
}

function checkOptions({ repetitions, chains, sweeps, mostSweeps, priorShape }: RehearsalOptions): void {
  const isWhole = (n: number, least: number): boolean => Number.isSafeInteger(n) && n >= least;
  if (!isWhole(repetitions, 1)) throw new RangeError(`repetitions must be 1 or more, not ${repetitions}`);
  if (!isWhole(chains, 2)) throw new RangeError(`chains must be 2 or more, not ${chains}`);
  if (!isWhole(sweeps, 8) || sweeps % 4 !== 0)
    throw new RangeError(`sweeps must be a multiple of 4 from 8 up, not ${sweeps}`);
  if (!(mostSweeps >= sweeps)) throw new RangeError(`mostSweeps must be at least sweeps, not ${mostSweeps}`);
  if (!(priorShape > 0)) throw new RangeError(`the prior's shape must be above 0, not ${priorShape}`);
}

type Way = 'fixed' | 'free';

interface Stage {
  options: RehearsalOptions;
  model: UntaggedModel;
  names: string[];
  isMatched: boolean;
  seed: number;
  /** `[columns]`. */
  reference: Float64Array;
  calibrated: Float64Array;
  tallies: Record<Way, WayTally>;
  narrowed: Float64Array;
  rhat: number;
  effective: number;
  unmixed: number;
}

interface WayTally {
  /** `[level][columns]`: campaigns whose interval held the truth, and summed widths. */
  held: Float64Array[];
  widths: Float64Array[];
  /** `[level][campaigns]`: share of columns whose interval held the truth. */
  shares: number[][];
}

function stageOf(input: AuditInput, { contents }: ReferenceSpectrum, options: RehearsalOptions): Stage {
  const { posterior, tally, study } = input;
  const taking = [...contents.keys()].filter((j) => contents[j]! > 0);
  const columns = taking.length;
  const model: UntaggedModel = {
    columns,
    outcomes: posterior.outcomes,
    shape: Float64Array.from(taking.flatMap((j) => [...matchedDirichlet(posterior, j)])),
    shown: outcomePlaces(input).window,
    priorShape: options.priorShape,
    rate: Float64Array.from(taking, (j) => options.priorShape / contents[j]!),
  };
  const wayTally = (): WayTally => ({
    held: LEVELS.map(() => new Float64Array(columns)),
    widths: LEVELS.map(() => new Float64Array(columns)),
    shares: LEVELS.map(() => []),
  });
  return {
    options,
    model,
    names: taking.map((j) => tally.columnNames[j]!),
    isMatched: taking.some((j) => columnOf(posterior, j).scale !== null),
    seed: study.ensemble.seed,
    reference: Float64Array.from(taking, (j) => contents[j]!),
    calibrated: summedVariances(model),
    tallies: { fixed: wayTally(), free: wayTally() },
    narrowed: new Float64Array(columns),
    rhat: 1,
    effective: Infinity,
    unmixed: 0,
  };
}

/** `sum_k Var p[j, k]` of each column under its calibration: `sum m (1 - m) / (A + 1)`. */
function summedVariances({ columns, outcomes, shape }: UntaggedModel): Float64Array {
  return new Float64Array(columns).map((_, j) => {
    const row = shape.subarray(j * outcomes, (j + 1) * outcomes);
    const total = row.reduce((a, b) => a + b, 0);
    return row.reduce((sum, a) => sum + (a / total) * (1 - a / total), 0) / (total + 1);
  });
}

function playCampaign(stage: Stage, campaign: number): void {
  const { model, options, seed } = stage;
  const stream = streamOf(seed, PURPOSE.rehearsal, campaign, 0);
  const truth: GibbsState = {
    contents: options.truth === 'prior' ? drawContents(model, stream) : stage.reference.slice(),
    matrix: new Float64Array(model.shape.length),
  };
  drawMatrix(model, null, stream, truth.matrix);
  const data = drawData(model, truth, stream);
  (['fixed', 'free'] as const).forEach((way, w) => {
    const inference = infer(stage, data, way === 'free', campaign, 1 + w * options.chains);
    count(stage.tallies[way], inference.draws, truth.contents);
    stage.rhat = Math.max(stage.rhat, inference.rhat);
    stage.effective = Math.min(stage.effective, inference.effective);
    if (!hasMixed(inference)) stage.unmixed++;
    if (inference.variances) {
      inference.variances.forEach((v, j) => (stage.narrowed[j]! += Math.sqrt(v / stage.calibrated[j]!)));
    }
  });
}

interface Inference {
  /** `[column][chain]`: kept draws of the content. */
  draws: Float64Array[][];
  /** `[columns]`: summed variances of a column's probabilities over the kept draws; `null` where the matrix is fixed. */
  variances: Float64Array | null;
  /** Largest split-chain R-hat of a content, and fewest effective draws. */
  rhat: number;
  effective: number;
}

function hasMixed({ rhat, effective }: { rhat: number; effective: number }): boolean {
  return rhat <= MIXED && effective >= ENOUGH_DRAWS;
}

function infer(stage: Stage, data: Float64Array, isFree: boolean, campaign: number, firstStream: number): Inference {
  const { model, options, seed } = stage;
  const { sweep } = sweeper(model, data, isFree);
  const chains = Array.from({ length: options.chains }, (_, c) => {
    const stream = streamOf(seed, PURPOSE.rehearsal, campaign, firstStream + c);
    // Chains begin apart: contents from the prior, the matrix at its mean or from its calibration.
    const state: GibbsState = { contents: drawContents(model, stream), matrix: meanMatrix(model) };
    if (isFree) drawMatrix(model, null, stream, state.matrix);
    for (let i = 0; i < options.sweeps / 2; i++) sweep(state, stream);
    return { stream, state };
  });
  for (let done = options.sweeps / 2; ; done *= 2) {
    const draws = Array.from({ length: model.columns }, () => chains.map(() => new Float64Array(done)));
    const moments = isFree ? new CellMoments(model.shape.length) : null;
    chains.forEach(({ stream, state }, c) => {
      for (let i = 0; i < done; i++) {
        sweep(state, stream);
        for (let j = 0; j < model.columns; j++) draws[j]![c]![i] = state.contents[j]!;
        moments?.add(state.matrix);
      }
    });
    const isLast = 4 * done > options.mostSweeps;
    const rhat = Math.max(...draws.map(splitRhat));
    // Autocorrelations of chains that stand apart would only cost time.
    const effective = rhat <= MIXED || isLast ? Math.min(...draws.map(effectiveDraws)) : 0;
    if (hasMixed({ rhat, effective }) || isLast) {
      return { draws, variances: moments && moments.summed(model.outcomes), rhat, effective };
    }
  }
}

/** Means and variances of cells over draws (Welford). */
class CellMoments {
  private readonly mean: Float64Array;
  private readonly squares: Float64Array;
  private count = 0;

  constructor(cells: number) {
    this.mean = new Float64Array(cells);
    this.squares = new Float64Array(cells);
  }

  add(matrix: Float64Array): void {
    this.count++;
    for (let i = 0; i < matrix.length; i++) {
      const step = matrix[i]! - this.mean[i]!;
      this.mean[i]! += step / this.count;
      this.squares[i]! += step * (matrix[i]! - this.mean[i]!);
    }
  }

  /** Variances summed over the outcomes of each column. */
  summed(outcomes: number): Float64Array {
    const sums = new Float64Array(this.mean.length / outcomes);
    this.squares.forEach((square, i) => (sums[Math.floor(i / outcomes)]! += square / (this.count - 1)));
    return sums;
  }
}

function count(tally: WayTally, draws: Float64Array[][], truth: Float64Array): void {
  const sorted = draws.map((chains) => {
    const all = new Float64Array(chains.length * chains[0]!.length);
    chains.forEach((chain, c) => all.set(chain, c * chain.length));
    return all.sort();
  });
  LEVELS.forEach((level, l) => {
    let held = 0;
    sorted.forEach((all, j) => {
      const lower = quantileOfSorted(all, (1 - level) / 2);
      const upper = quantileOfSorted(all, (1 + level) / 2);
      tally.widths[l]![j]! += upper - lower;
      if (truth[j]! < lower || truth[j]! > upper) return;
      tally.held[l]![j]!++;
      held++;
    });
    tally.shares[l]!.push(held / sorted.length);
  });
}

function reportOf(stage: Stage): Rehearsal {
  const { options, names, reference, tallies, narrowed } = stage;
  const wayOf = ({ held, widths }: WayTally, j: number): WayOfInferring => ({
    coverage: pair((l) => {
      const value = held[l]![j]! / options.repetitions;
      return { value, ...clopperPearson(held[l]![j]!, options.repetitions, 0.95) };
    }),
    width: pair((l) => widths[l]![j]! / options.repetitions / reference[j]!),
  });
  const columns = names.map((column, j) => ({
    column,
    fixed: wayOf(tallies.fixed, j),
    free: wayOf(tallies.free, j),
    narrowed: narrowed[j]! / options.repetitions,
  }));
  return {
    options,
    columns,
    overall: { fixed: overallOf(tallies.fixed), free: overallOf(tallies.free) },
    convergence: {
      rhat: stage.rhat,
      effectiveDraws: stage.effective,
      unmixed: stage.unmixed / (2 * options.repetitions),
    },
    isMatched: stage.isMatched,
  };
}

function overallOf({ shares }: WayTally): Rehearsal['overall']['free'] {
  const mean = (values: number[]): number => values.reduce((a, b) => a + b, 0) / values.length;
  const error = (values: number[]): number => {
    if (values.length < 2) return 0;
    const middle = mean(values);
    return Math.sqrt(values.reduce((sum, x) => sum + (x - middle) ** 2, 0) / (values.length - 1) / values.length);
  };
  return { coverage: pair((l) => mean(shares[l]!)), error: pair((l) => error(shares[l]!)) };
}

function pair<T>(at: (level: number) => T): [T, T] {
  return [at(0), at(1)];
}
