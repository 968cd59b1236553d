import { hasNoPosterior, type Posterior } from '../posterior/posterior';

/** What a matrix is drawn from; a `Posterior` is one. */
export type DrawnFrom = Pick<Posterior, 'columns' | 'outcomes' | 'shape' | 'scale'>;

/**
 * The ensemble's sampler, handed in because it stands above the audit: planned once, then asked for the first `replicas` (at
 * most `BLOCK`) of a block, `[replica, column, outcome]`.
 */
export type MatrixSampler = (
  from: DrawnFrom,
  seed: number,
) => (block: number, replicas: number, out: Float64Array) => void;

/** A measure that looks at sampled matrices one by one. */
export interface MatrixWatcher {
  /** One replica, `[columns, outcomes]`; the array is used again. A column without posterior is 0 in it. */
  watch(matrix: Float64Array): void;
}

/** Replicas of a block, as in the ensemble: what the audit looks at are the ensemble's own first replicas. */
export const BLOCK = 32;

/** Replicas behind the audit's intervals and probabilities: a probability of 0.05 is then known to 0.011 (one sigma). */
export const REPLICAS = 400;

/** Cells drawn in all at the most: a large matrix is looked at in fewer replicas, never under `FEWEST_REPLICAS`. */
export const MOST_CELLS = 4e7;
export const FEWEST_REPLICAS = 100;

/** How many replicas the audit of a matrix looks at. */
export function auditReplicas({ columns, outcomes }: DrawnFrom): number {
  return Math.max(FEWEST_REPLICAS, Math.min(REPLICAS, Math.floor(MOST_CELLS / (columns * outcomes))));
}

/** Draws the first `replicas` matrices of the seed's ensemble and shows each to every watcher. */
export function watchMatrices(
  posterior: Posterior,
  sampler: MatrixSampler,
  seed: number,
  replicas: number,
  watchers: readonly MatrixWatcher[],
): void {
  const { columns, outcomes } = posterior;
  const without = Array.from({ length: columns }, (_, j) => j).filter((j) => hasNoPosterior(posterior, j));
  const drawable = { ...posterior, shape: posterior.shape.slice() };
  for (const j of without) drawable.shape.fill(1, j * outcomes, (j + 1) * outcomes);
  const draw = sampler(drawable, seed);
  const size = columns * outcomes;
  const block = new Float64Array(Math.min(BLOCK, replicas) * size);
  for (let first = 0; first < replicas; first += BLOCK) {
    const count = Math.min(BLOCK, replicas - first);
    draw(first / BLOCK, count, block);
    for (let r = 0; r < count; r++) {
      const matrix = block.subarray(r * size, (r + 1) * size);
      for (const j of without) matrix.fill(0, j * outcomes, (j + 1) * outcomes);
      for (const watcher of watchers) watcher.watch(matrix);
    }
  }
}
