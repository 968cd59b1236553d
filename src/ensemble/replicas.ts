import { BLOCK, drawBlock, planEnsemble, type SamplerParameters } from './draw';

/** Sampled matrices, `[count, columns, outcomes]`, the first of them replica number `first`. */
export interface DrawnReplicas {
  first: number;
  count: number;
  values: Float64Array;
}

/**
 * Draws replicas `[from, to)` of an ensemble in this thread, block by block: the numbers a bundle of the same parameters
 * and seed holds, to the bit, whatever range is asked for. Each block's array is new and the caller's to keep. Throws
 * `InputError` for a column without a shape above 0.
 */
export function* drawReplicas(
  parameters: SamplerParameters,
  seed: number,
  from: number,
  to: number,
): Generator<DrawnReplicas> {
  const plan = planEnsemble(parameters);
  const cells = parameters.columns * parameters.outcomes;
  for (let block = Math.floor(from / BLOCK); block * BLOCK < to; block++) {
    const start = block * BLOCK;
    const first = Math.max(from, start);
    const end = Math.min(to, start + BLOCK);
    // A block's numbers begin at its first replica: those before `from` are drawn and left out.
    const values = new Float64Array((end - start) * cells);
    drawBlock(plan, seed, block, end - start, values);
    yield { first, count: end - first, values: values.slice((first - start) * cells) };
  }
}
