import { BLOCK, drawBlock, type EnsemblePlan } from '../../../src/ensemble/draw';
import type { Replicas } from '../../bridge';
import type { Analysis } from '../analysis';

/** The replicas of the given indices, the very numbers that a bundle of this study holds. */
export function replicasView({ posterior, ensemble }: Analysis, seed: number, indices: readonly number[]): Replicas {
  const size = posterior.columns * posterior.outcomes;
  const values = new Float64Array(indices.length * size);
  const blocks = new Set(indices.map((index) => Math.floor(index / BLOCK)));
  for (const block of blocks) {
    const inBlock = indices.map((index) => index - block * BLOCK);
    const drawn = drawnOf(inBlock.filter(isInBlock), ensemble(), seed, block, size);
    inBlock.forEach((at, i) => {
      if (isInBlock(at)) values.set(drawn.subarray(at * size, (at + 1) * size), i * size);
    });
  }
  return { indices: [...indices], values };
}

function isInBlock(at: number): boolean {
  return at >= 0 && at < BLOCK;
}

/** The replicas of a block up to the last that is wanted. */
function drawnOf(wanted: number[], ensemble: EnsemblePlan, seed: number, block: number, size: number): Float64Array {
  const count = Math.max(...wanted) + 1;
  const drawn = new Float64Array(count * size);
  drawBlock(ensemble, seed, block, count, drawn);
  return drawn;
}
