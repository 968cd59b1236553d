import { describe, expect, it } from 'vitest';
import { BLOCK, drawBlock, planEnsemble } from '../../../src/ensemble/draw';
import { drawReplicas } from '../../../src/ensemble/replicas';
import { InputError } from '../../../src/study/input-error';

const parameters = { columns: 2, outcomes: 3, shape: Float64Array.of(0.5, 1, 7, 2, 0, 3), scale: null };
const CELLS = 6;

function all(from: number, to: number): number[] {
  return [...drawReplicas(parameters, 5, from, to)].flatMap(({ values }) => [...values]);
}

describe('replicas drawn in one thread', () => {
  it('are the numbers of the blocks', () => {
    const block = new Float64Array(BLOCK * CELLS);
    drawBlock(planEnsemble(parameters), 5, 1, BLOCK, block);
    expect(all(BLOCK, 2 * BLOCK)).toEqual([...block]);
  });

  it('do not depend on the range that is asked for', () => {
    const whole = all(0, 3 * BLOCK);
    for (const [from, to] of [
      [0, 1],
      [BLOCK - 1, BLOCK + 1],
      [5, 2 * BLOCK + 7],
      [BLOCK, BLOCK],
      [70, 71],
    ] as const) {
      expect(all(from, to)).toEqual(whole.slice(from * CELLS, to * CELLS));
    }
  });

  it('come with their numbers', () => {
    const blocks = [...drawReplicas(parameters, 5, BLOCK - 2, BLOCK + 3)];
    expect(blocks.map(({ first, count }) => [first, count])).toEqual([
      [BLOCK - 2, 2],
      [BLOCK, 3],
    ]);
  });

  it('need a posterior in every column', () => {
    const none = { ...parameters, shape: Float64Array.of(1, 1, 1, 0, 0, 0) };
    expect(() => [...drawReplicas(none, 5, 0, 1)]).toThrow(InputError);
  });
});
