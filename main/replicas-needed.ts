import { adaptiveRule, blockReplicas, type Stability } from '../src/audit/replicas-needed';
import { BLOCK, drawBlock, type EnsemblePlan } from '../src/ensemble/draw';
import { formatCount } from '../src/audit/wording';
import { InputError } from '../src/study/input-error';

/** Blocks looked at before an expected number is believed: its own relative error is then about a quarter. */
const FEWEST_BLOCKS = 8;
/** Blocks looked at in any case at the most: beyond, the number that is expected to suffice is given. */
const MOST_BLOCKS = 40;

/** Numbers of one block kept at once, 256 MB: a credibility of 0.9999 asks for blocks of a million replicas. */
export const MOST_BLOCK_NUMBERS = 2 ** 25;

export interface Needed {
  replicas: number;
  note: string;
}

export interface NeededOptions {
  ensemble: EnsemblePlan;
  seed: number;
  /** Expected contents of the columns, `[columns]`, that every replica folds. */
  reference: Float64Array;
  /** Significant digits of every standard uncertainty. */
  digits: number;
  credibility: number;
  onBlock: (blocks: number, most: number) => void;
}

/**
 * Replicas needed so that mean, standard uncertainty and interval ends of every outcome of the folded reference
 * spectrum are stable to `digits` digits, by the adaptive rule of JCGM 101:2008, 7.9, on replicas of the ensemble itself.
 * Where the rule is not met within `MOST_BLOCKS` the answer is the number that is expected to meet it. Throws
 * `InputError` for a credibility so near to 1 that a block does not fit `MOST_BLOCK_NUMBERS`.
 */
export function replicasNeeded({ ensemble, seed, reference, digits, credibility, onBlock }: NeededOptions): Needed {
  const { outcomes } = ensemble;
  const size = Math.ceil(blockReplicas(credibility) / BLOCK) * BLOCK;
  if (size * outcomes > MOST_BLOCK_NUMBERS) {
    const what = `${credibility} asks for blocks of ${formatCount(size)} replicas`;
    throw new InputError('credibility', what, 'ask for a credibility further from 1, or choose the replicas yourself');
  }
  const rule = adaptiveRule(outcomes, { digits, credibility });
  const drawn = new Float64Array(BLOCK * reference.length * outcomes);
  let stability: Stability | null = null;
  for (let block = 0; block < MOST_BLOCKS; block++) {
    const folded = new Float64Array(size * outcomes);
    for (let r = 0; r < size; r += BLOCK) {
      drawBlock(ensemble, seed, (block * size + r) / BLOCK, BLOCK, drawn);
      foldBlock(drawn, reference, outcomes, folded.subarray(r * outcomes, (r + BLOCK) * outcomes));
    }
    rule.add(folded);
    onBlock(block + 1, MOST_BLOCKS);
    if (block === 0) continue;
    stability = rule.stability();
    if (stability.isStable || (block + 1 >= FEWEST_BLOCKS && stability.expected > MOST_BLOCKS * size)) break;
  }
  return neededOf(stability!, digits);
}

function neededOf({ isStable, replicas, expected }: Stability, digits: number): Needed {
  const words = `${digits} significant ${digits === 1 ? 'digit' : 'digits'} of every folded uncertainty`;
  if (isStable) return { replicas, note: `${formatCount(replicas)} replicas give ${words} (JCGM 101:2008, 7.9)` };
  const seen = `seen on ${formatCount(replicas)}`;
  return {
    replicas: expected,
    note: `about ${formatCount(expected)} replicas are expected to give ${words} (${seen})`,
  };
}

/** `out[r, k] = sum_j reference[j] p[r, j, k]`. */
function foldBlock(drawn: Float64Array, reference: Float64Array, outcomes: number, out: Float64Array): void {
  const columns = reference.length;
  for (let r = 0; r < BLOCK; r++) {
    for (let j = 0; j < columns; j++) {
      const content = reference[j]!;
      const from = (r * columns + j) * outcomes;
      for (let k = 0; k < outcomes; k++) out[r * outcomes + k]! += content * drawn[from + k]!;
    }
  }
}
