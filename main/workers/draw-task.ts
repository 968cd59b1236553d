import { closeSync, openSync, readSync } from 'node:fs';
import { BLOCK, drawBlock, planEnsemble, type EnsemblePlan, type SamplerParameters } from '../../src/ensemble/draw';
import { InputError } from '../../src/study/input-error';
import type { Handlers } from './serve';

/** The calls of a draw worker. */
export type DrawCalls = {
  begin: { argument: { parameters: SamplerParameters; seed: number; replicas: number }; result: null };
  /** Draws one block into shared memory. */
  draw: { argument: { block: number; into: SharedArrayBuffer }; result: null };
  /** Draws one block again and compares it with a file, to the bit. */
  check: { argument: { block: number; path: string; dataStart: number }; result: Mismatch | null };
};

/** The first cell of a block that is not what the seed and the tally give. */
export interface Mismatch {
  replica: number;
  column: number;
  outcome: number;
  found: number;
  expected: number;
}

/** What a draw worker does: blocks of replicas. */
export function drawTask(): Handlers<DrawCalls> {
  let drawing: Drawing | null = null;
  return {
    begin({ parameters, seed, replicas }) {
      drawing = new Drawing(parameters, seed, replicas);
      return { result: null };
    },
    draw({ block, into }) {
      drawing!.draw(block, new Float64Array(into));
      return { result: null };
    },
    check: ({ block, path, dataStart }) => ({ result: drawing!.check(block, path, dataStart) }),
  };
}

class Drawing {
  private readonly plan: EnsemblePlan;
  private readonly cells: number;

  constructor(
    private readonly parameters: SamplerParameters,
    private readonly seed: number,
    private readonly replicas: number,
  ) {
    this.plan = planEnsemble(parameters);
    this.cells = parameters.columns * parameters.outcomes;
  }

  /** Returns how many replicas the block has. */
  draw(block: number, into: Float64Array): number {
    const count = Math.min(BLOCK, this.replicas - block * BLOCK);
    drawBlock(this.plan, this.seed, block, count, into);
    return count;
  }

  check(block: number, path: string, dataStart: number): Mismatch | null {
    const expected = new Float64Array(BLOCK * this.cells);
    const length = this.draw(block, expected) * this.cells;
    const first = block * BLOCK * this.cells;
    const found = readDoubles(path, dataStart + first * 8, length);
    const { outcomes } = this.parameters;
    for (let i = 0; i < length; i++) {
      if (Object.is(found[i], expected[i])) continue;
      const inReplica = i % this.cells;
      return {
        replica: Math.floor((first + i) / this.cells),
        column: Math.floor(inReplica / outcomes),
        outcome: inReplica % outcomes,
        found: found[i]!,
        expected: expected[i]!,
      };
    }
    return null;
  }
}

function readDoubles(path: string, from: number, length: number): Float64Array {
  const values = new Float64Array(length);
  const bytes = new Uint8Array(values.buffer);
  const file = openSync(path, 'r');
  try {
    for (let done = 0; done < bytes.length;) {
      const got = readSync(file, bytes, done, bytes.length - done, from + done);
      if (got === 0) throw new InputError(path, 'ends before its last replica', 'build the bundle again');
      done += got;
    }
  } finally {
    closeSync(file);
  }
  return values;
}
