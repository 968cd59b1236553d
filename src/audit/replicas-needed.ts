import { columnOf, hasNoPosterior, type Posterior } from '../posterior/posterior';
import { BLOCK, type MatrixSampler } from './matrix-draws';

/** How many significant digits of each standard uncertainty are to be right, for intervals at `credibility`. */
export interface AdaptiveRule {
  digits: number;
  credibility: number;
}

/**
 * Numerical tolerance of `digits` significant digits of a standard uncertainty `u = c 10^l`, `c` a whole number of that many
 * digits: half of `10^l`. 0 for `u = 0`. Source: JCGM 101:2008, 7.9.2 (clause from memory).
 */
export function numericalTolerance(u: number, digits: number): number {
  if (!(u > 0)) return 0;
  // The exponent form rounds 9.96 to 1.0e1 by itself.
  const exponent = Number(u.toExponential(digits - 1).split('e')[1]);
  return 0.5 * 10 ** (exponent - digits + 1);
}

/** The quantities that have to be stable, of each of `count` outputs. */
const REPORTED = ['mean', 'standard uncertainty', 'lower end', 'upper end'] as const;
export type Reported = (typeof REPORTED)[number];

/** What the accumulator knows after some blocks. */
export interface Stability {
  blocks: number;
  replicas: number;
  /** Every reported quantity of every output is within its tolerance. */
  isStable: boolean;
  /** Replicas that are expected to suffice: what is known falls as one over the root of the blocks. */
  expected: number;
  /** The output and quantity furthest from its tolerance. */
  worst: { output: number; quantity: Reported };
}

export interface Accumulator {
  /** A block of replicas, `[replicas, outputs]`, of the same length each time. Throws `RangeError` for another. */
  add(block: Float64Array): void;
  /** Throws `RangeError` before there are two blocks: one has no spread. */
  stability(): Stability;
}

/**
 * The adaptive rule of JCGM 101:2008, 7.9.4 (from memory), fed with blocks of replicas of `outputs` quantities at once: stable
 * when twice the standard deviation of the averages over blocks of each mean, standard uncertainty and interval end does not
 * exceed the numerical tolerance. Intervals are the symmetric ones of each block, by 7.7's order statistics.
 */
export function adaptiveRule(outputs: number, { digits, credibility }: AdaptiveRule): Accumulator {
  const averages = REPORTED.map(() => ({ mean: new Float64Array(outputs), squares: new Float64Array(outputs) }));
  /** Sum over blocks of the squares about each block's own mean. */
  const within = new Float64Array(outputs);
  let blocks = 0;
  let size = 0;
  const add = (block: Float64Array): void => {
    const replicas = block.length / outputs;
    if (!Number.isInteger(replicas) || replicas < 2 || (blocks > 0 && replicas !== size)) {
      throw new RangeError(`a block of ${block.length} values for ${outputs} outputs after blocks of ${size} replicas`);
    }
    size = replicas;
    blocks++;
    const values = new Float64Array(size);
    for (let o = 0; o < outputs; o++) {
      for (let r = 0; r < size; r++) values[r] = block[r * outputs + o]!;
      const found = summaryOf(values, credibility);
      within[o]! += found[1] ** 2 * (size - 1);
      found.forEach((x, q) => include(averages[q]!, o, x, blocks));
    }
  };
  const stability = (): Stability => {
    if (blocks < 2) throw new RangeError('two blocks at least: one has no spread');
    let most = 0;
    let worst: Stability['worst'] = { output: 0, quantity: 'mean' };
    for (let o = 0; o < outputs; o++) {
      const between = averages[0]!.squares[o]! * size;
      const tolerance = numericalTolerance(Math.sqrt((within[o]! + between) / (blocks * size - 1)), digits);
      REPORTED.forEach((quantity, q) => {
        const sd = Math.sqrt(averages[q]!.squares[o]! / (blocks * (blocks - 1)));
        const excess = sd > 0 ? (2 * sd) / tolerance : 0;
        if (excess > most) [most, worst] = [excess, { output: o, quantity }];
      });
    }
    const expected = Math.max(2, Math.ceil(blocks * most ** 2)) * size;
    return { blocks, replicas: blocks * size, isStable: most <= 1, expected, worst };
  };
  return { add, stability };
}

/** Welford's update of mean and sum of squares about it. */
function include(average: { mean: Float64Array; squares: Float64Array }, o: number, x: number, count: number): void {
  const step = x - average.mean[o]!;
  average.mean[o]! += step / count;
  average.squares[o]! += step * (x - average.mean[o]!);
}

/** Mean, sd, and ends of the symmetric interval of a block, which is sorted. */
function summaryOf(values: Float64Array, credibility: number): [number, number, number, number] {
  const count = values.length;
  let mean = 0;
  for (let r = 0; r < count; r++) mean += values[r]! / count;
  let squares = 0;
  for (let r = 0; r < count; r++) squares += (values[r]! - mean) ** 2;
  values.sort();
  const inside = Math.min(count - 1, Math.floor(credibility * count + 0.5));
  const low = Math.max(1, Math.floor((count - inside + 1) / 2));
  return [mean, Math.sqrt(squares / (count - 1)), values[low - 1]!, values[low + inside - 1]!];
}

/** Replicas of a block: the guide's `max(100 / (1 - p), 10^4)`. */
export function blockReplicas(credibility: number): number {
  // Twelve digits: `1 - 0.9999` is not the double nearest to 0.0001.
  return Math.max(Math.ceil(Number((100 / (1 - credibility)).toPrecision(12))), 10_000);
}

/** What an ensemble needs so that every cell of every column is known to the digits asked for. */
export interface ReplicasNeeded {
  /** Of the column that needs most: reached by the rule, or expected where `most` was met before it. */
  replicas: number;
  isStable: boolean;
  column: number;
  outcome: number;
  quantity: Reported;
}

/**
 * Runs the rule on each column of an ensemble, at most `most` replicas each, and yields the share of columns done. Columns without
 * posterior are passed over; `null` where none has one. Columns are drawn one by one: memory is one block of one column.
 */
export function* replicasNeeded(
  posterior: Posterior,
  sampler: MatrixSampler,
  seed: number,
  rule: AdaptiveRule,
  most: number,
  block = blockReplicas(rule.credibility),
): Generator<number, ReplicasNeeded | null> {
  let needed: ReplicasNeeded | null = null;
  for (let column = 0; column < posterior.columns; column++) {
    if (!hasNoPosterior(posterior, column)) {
      const found = columnNeeds(posterior, column, sampler, seed, rule, most, block);
      if (!needed || found.replicas > needed.replicas) needed = found;
    }
    yield (column + 1) / posterior.columns;
  }
  return needed;
}

function columnNeeds(
  posterior: Posterior,
  column: number,
  sampler: MatrixSampler,
  seed: number,
  rule: AdaptiveRule,
  most: number,
  block: number,
): ReplicasNeeded {
  const { outcomes } = posterior;
  const draw = sampler({ columns: 1, outcomes, ...columnOf(posterior, column) }, seed);
  const accumulator = adaptiveRule(outcomes, rule);
  const values = new Float64Array(block * outcomes);
  const perBlock = Math.ceil(block / BLOCK);
  for (let blocks = 0; ; blocks++) {
    for (let i = 0; i < perBlock; i++) {
      const from = i * BLOCK;
      const count = Math.min(BLOCK, block - from);
      draw(blocks * perBlock + i, count, values.subarray(from * outcomes, (from + count) * outcomes));
    }
    accumulator.add(values);
    if (blocks === 0) continue;
    const { isStable, replicas, expected, worst } = accumulator.stability();
    if (isStable || replicas + block > most) {
      const { output: outcome, quantity } = worst;
      return { replicas: isStable ? replicas : Math.max(replicas, expected), isStable, column, outcome, quantity };
    }
  }
}
