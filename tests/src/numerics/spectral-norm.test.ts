import { Matrix, SingularValueDecomposition } from 'ml-matrix';
import { describe, expect, it } from 'vitest';
import { PURPOSE, streamOf } from '../../../src/numerics/random';
import { NORM_TOLERANCE, spectralNorm } from '../../../src/numerics/spectral-norm';

const stream = streamOf(1, PURPOSE.test, 0, 0);
const random = (rows: number, columns: number): Float64Array =>
  new Float64Array(rows * columns).map((_, i) => stream.normal() / (1 + (i % columns)));

describe('The spectral norm', () => {
  it.each([
    [100, 103],
    [103, 100],
    [3, 50],
    [50, 3],
    [1, 7],
    [7, 1],
    [1, 1],
  ])(
    'of a random %i by %i matrix is that of a singular value decomposition (ml-matrix), from below',
    (rows, columns) => {
      for (let i = 0; i < 5; i++) {
        const matrix = random(rows, columns);
        const options = { autoTranspose: true };
        const known = new SingularValueDecomposition(Matrix.from1DArray(rows, columns, matrix), options).diagonal[0]!;
        const found = spectralNorm(matrix, rows, columns);
        expect(found / known).toBeGreaterThan(1 - NORM_TOLERANCE);
        expect(found / known).toBeLessThan(1 + NORM_TOLERANCE / 50);
      }
    },
  );

  it('of a matrix of blocks is that of the block with the largest, not of the longest row', () => {
    expect(spectralNorm(Float64Array.of(3, 0, 0, 0, 2, 2, 0, 2, 2), 3, 3)).toBeCloseTo(4, 3);
  });

  it('of many equal singular values, of rank one and of nothing is exact', () => {
    const identity = new Float64Array(400).map((_, i) => (i % 21 === 0 ? -2 : 0));
    expect(spectralNorm(identity, 20, 20)).toBeCloseTo(2, 5);
    expect(spectralNorm(Float64Array.of(1, 2, 2, 2, 4, 4), 2, 3)).toBeCloseTo(Math.sqrt(45), 4);
    expect(spectralNorm(new Float64Array(6), 2, 3)).toBe(0);
  });

  it('does not depend on the scale of the matrix, tiny or huge', () => {
    const matrix = random(9, 9);
    const known = spectralNorm(matrix, 9, 9);
    for (const scale of [1e-120, 1e120]) {
      expect(
        spectralNorm(
          matrix.map((x) => x * scale),
          9,
          9,
        ) /
          scale /
          known,
      ).toBeCloseTo(1, 4);
    }
  });
});
