import { createHash } from 'node:crypto';
import fc from 'fast-check';
import { describe, expect, it, vi } from 'vitest';
import { ANCHOR_SCALE, ANCHOR_SHAPE, EQUAL_SCALES } from '../../../src/ensemble/column-plan';
import { BLOCK, drawBlock, planEnsemble, type SamplerParameters } from '../../../src/ensemble/draw';
import { InputError } from '../../../src/study/input-error';
import { reference } from '../numerics/reference';
import { banded } from './banded';
import { distanceFromBeta, LIMIT } from './kolmogorov';

const SEED = 20261201;

/** Bytes are part of the bundle's contract: what changes them breaks every bundle ever written. */
const made = reference<{
  seed: number;
  block: number;
  sets: { name: string; shape: number[][]; scale: number[][] | null; first: number[]; sha256: string }[];
}>('replicas');

function draw(parameters: SamplerParameters, block = 0, replicas = BLOCK, seed = SEED): Float64Array {
  const out = new Float64Array(replicas * parameters.columns * parameters.outcomes);
  drawBlock(planEnsemble(parameters), seed, block, replicas, out);
  return out;
}

const oneColumn = (shape: readonly number[], scale: readonly number[] | null = null): SamplerParameters => ({
  columns: 1,
  outcomes: shape.length,
  shape: Float64Array.from(shape),
  scale: scale && Float64Array.from(scale),
});

/** Replicas of one column, `[replica, outcome]`, over as many blocks as it takes. */
function many(parameters: SamplerParameters, replicas: number): Float64Array {
  const plan = planEnsemble(parameters);
  const all = new Float64Array(replicas * parameters.outcomes);
  const size = BLOCK * parameters.outcomes;
  for (let block = 0; block * BLOCK < replicas; block++) {
    drawBlock(plan, SEED, block, BLOCK, all.subarray(block * size, (block + 1) * size));
  }
  return all;
}

const everyNth = (all: Float64Array, n: number, from = 0): Float64Array =>
  Float64Array.from({ length: all.length / n }, (_, i) => all[i * n + from]!);

const shape = fc.oneof(
  fc.constantFrom(0, 0.5, 1, 1e-300, 1e12),
  fc.double({ min: -12, max: 9, noNaN: true }).map((power) => 10 ** power),
);
const scale = fc.double({ min: -100, max: 100, noNaN: true }).map((power) => 10 ** power);
const column = fc
  .array(fc.tuple(shape, scale), { minLength: 1, maxLength: 12 })
  .filter((cells) => cells.some(([a]) => a > 0));

describe('A block of replicas', () => {
  it('is the same to the bit where the system grants no memory for WebAssembly, for any shapes and scales', () => {
    fc.assert(
      fc.property(fc.array(column, { minLength: 1, maxLength: 3 }), fc.boolean(), (columns, weighted) => {
        const outcomes = Math.max(...columns.map((cells) => cells.length));
        const cells = columns.flatMap((each) => Array.from({ length: outcomes }, (_, k) => each[k] ?? [0, 1]));
        const parameters: SamplerParameters = {
          columns: columns.length,
          outcomes,
          shape: Float64Array.from(cells, ([a]) => a!),
          scale: weighted ? Float64Array.from(cells, ([, s]) => s!) : null,
        };
        const quick = draw(parameters, 3);
        const refused = vi.spyOn(WebAssembly, 'Memory').mockImplementation(function () {
          throw new RangeError('WebAssembly.Memory(): could not allocate memory');
        });
        const plain = draw(parameters, 3);
        expect(refused).toHaveBeenCalledOnce();
        refused.mockRestore();
        expect(plain).toEqual(quick);
      }),
      { numRuns: 300, seed: 12 },
    );
  });

  it('has columns that add up to 1 within 1e-12, no share below 0, and 0 where the shape is 0, for any shapes and scales', () => {
    fc.assert(
      fc.property(column, fc.boolean(), (cells, weighted) => {
        const shapes = cells.map(([a]) => a);
        const drawn = draw(oneColumn(shapes, weighted ? cells.map(([, s]) => s) : null), 3, 8);
        for (let r = 0; r < 8; r++) {
          const shares = drawn.subarray(r * cells.length, (r + 1) * cells.length);
          expect(Math.abs(shares.reduce((a, b) => a + b) - 1)).toBeLessThan(1e-12);
          shares.forEach((p, k) => expect(p >= 0 && (p === 0 || shapes[k]! > 0)).toBe(true));
        }
      }),
      { seed: 1, numRuns: 1000 },
    );
  });

  it('keeps that sum for a column of 2,003 outcomes', () => {
    const drawn = draw({ ...banded(1, 2003, 1e5, 0.5) }, 0, 4);
    for (let r = 0; r < 4; r++) {
      const sum = drawn.subarray(r * 2003, (r + 1) * 2003).reduce((a, b) => a + b);
      expect(Math.abs(sum - 1)).toBeLessThan(1e-12);
    }
  });

  it('is the beginning of a longer one, to the bit', () => {
    for (const parameters of [banded(3, 9, 40, 0.5), oneColumn([1e-4, 2e-3, 5e-4]), oneColumn([0.3, 1, 7, 0])]) {
      const whole = draw(parameters, 5);
      for (const replicas of [1, 7, 31])
        expect(draw(parameters, 5, replicas)).toEqual(whole.slice(0, (whole.length / BLOCK) * replicas));
    }
  });

  it('of some columns holds what the whole block holds of them, to the bit', () => {
    const parameters = banded(5, 7, 40, 0.5);
    const whole = draw(parameters, 2);
    const some = new Float64Array(BLOCK * 2 * 7);
    drawBlock(planEnsemble(parameters), SEED, 2, BLOCK, some, 1, 3);
    for (let r = 0; r < BLOCK; r++)
      expect(some.slice(r * 14, (r + 1) * 14)).toEqual(whole.slice((r * 5 + 1) * 7, (r * 5 + 3) * 7));
  });

  it('gives a column the same numbers whatever the other columns are', () => {
    const [one, other] = [banded(3, 7, 40, 0.5), banded(3, 7, 4000, 1)];
    other.shape.set(one.shape.subarray(14, 21), 14);
    const [a, b] = [draw(one), draw(other)];
    for (let r = 0; r < BLOCK; r++)
      expect(a.slice((r * 3 + 2) * 7, (r * 3 + 3) * 7)).toEqual(b.slice((r * 3 + 2) * 7, (r * 3 + 3) * 7));
  });

  it('is another for another seed, block or column', () => {
    const parameters = { columns: 2, outcomes: 3, shape: Float64Array.of(1, 2, 3, 1, 2, 3), scale: null };
    const drawn = [draw(parameters), draw(parameters, 1), draw(parameters, 0, BLOCK, SEED + 1)];
    const firsts = drawn.flatMap((values) => [values[0], values[3]]);
    expect(new Set(firsts).size).toBe(6);
  });

  it.each(made.sets)(
    'has the bytes that a second implementation in Python gives: $name',
    ({ shape, scale, first, sha256 }) => {
      const flat = (rows: number[][]): Float64Array => Float64Array.from(rows.flat());
      const drawn = draw(
        { columns: shape.length, outcomes: shape[0]!.length, shape: flat(shape), scale: scale && flat(scale) },
        made.block,
        BLOCK,
        made.seed,
      );
      expect([...drawn.subarray(0, first.length)]).toEqual(first);
      expect(createHash('sha256').update(new Uint8Array(drawn.buffer)).digest('hex')).toBe(sha256);
    },
  );

  it('refuses a column without a shape above 0 before it draws, and says which', () => {
    const bad = { columns: 3, outcomes: 2, shape: Float64Array.of(1, 1, 0, 0, 1, 1), scale: null };
    expect(() => planEnsemble(bad)).toThrow(InputError);
    expect(() => planEnsemble(bad)).toThrow(/^column 1: .*: give it a pseudo-count/);
  });

  it('refuses shapes and scales out of range, more replicas than a block has, and an array too short', () => {
    for (const bad of [-1, NaN, Infinity, 1e-301]) expect(() => planEnsemble(oneColumn([1, bad]))).toThrow(RangeError);
    for (const bad of [0, -1, NaN, Infinity])
      expect(() => planEnsemble(oneColumn([1, 1], [1, bad]))).toThrow(RangeError);
    expect(() => planEnsemble(oneColumn([1, 0], [1, NaN]))).not.toThrow();
    expect(() => draw(oneColumn([1, 1]), 0, BLOCK + 1)).toThrow(RangeError);
    expect(() => drawBlock(planEnsemble(oneColumn([1, 1])), 1, 0, 2, new Float64Array(3))).toThrow(RangeError);
  });
});

describe('The shares of a Dirichlet column', () => {
  it('have its means, variances and covariances, within 5 standard errors (Johnson, Kotz & Balakrishnan, ch. 49)', () => {
    const shapes = [0.5, 2.5, 1, 17, 0.5, 0.2, 0];
    const total = shapes.reduce((a, b) => a + b);
    const count = 32_000;
    const n = shapes.length;
    const all = many(oneColumn(shapes), count);
    for (let k = 0; k < n; k++) {
      const mean = shapes[k]! / total;
      for (let l = 0; l <= k; l++) {
        const other = shapes[l]! / total;
        const covariance = ((k === l ? mean : 0) - mean * other) / (total + 1);
        let [sum, product, square] = [0, 0, 0];
        for (let r = 0; r < count; r++) {
          const d = (all[r * n + k]! - mean) * (all[r * n + l]! - other);
          sum += all[r * n + k]! - mean;
          product += d;
          square += d * d;
        }
        const variance = (mean * (1 - mean)) / (total + 1);
        expect(Math.abs(sum / count)).toBeLessThanOrEqual(5 * Math.sqrt(variance / count));
        expect(Math.abs(product / count - covariance)).toBeLessThanOrEqual(5 * Math.sqrt(square / count / count));
      }
    }
  });

  it.each([
    [1e-3, 1e-3],
    [1e-3, 2.5],
    [0.05, 0.04],
    [0.05, 0.3],
    [0.3, 0.7],
    [0.5, 0.5],
    [0.5, 1e3],
    [1, 1],
    [1, 40],
    [1.5, 2.5],
    [2.5, 103],
    [1e3, 1e3],
    [1e3, 1e7],
    [1e7, 1e7],
    [1e12, 3],
    [1e12, 1e12],
    [ANCHOR_SHAPE, 0.01],
    [ANCHOR_SHAPE * 0.999, 0.01],
  ])('have the marginal Beta(%d, %d): Kolmogorov-Smirnov over 100,000 draws, level 1e-6', (a, b) => {
    const drawn = everyNth(many(oneColumn([a, b]), 100_000), 2);
    expect(distanceFromBeta(drawn, a, b)).toBeLessThan(LIMIT);
  });

  it('have Beta marginals for every kind of cell of one column', () => {
    const shapes = [0.5, 1, 7.5, 0.25, 0.5, 200, 1, 1e-3];
    const total = shapes.reduce((a, b) => a + b);
    const all = many(oneColumn(shapes), 32_000);
    shapes.forEach((a, k) =>
      expect(distanceFromBeta(everyNth(all, shapes.length, k), a, total - a)).toBeLessThan(LIMIT),
    );
  });

  it('are drawn without underflow for the tiniest shapes: one share takes all, each as often as its shape says', () => {
    const shapes = [1e-300, 3e-300, 6e-300];
    const all = many(oneColumn(shapes), 9_600);
    const whole = shapes.map((_, k) => everyNth(all, 3, k).filter((p) => p === 1).length);
    expect(whole.reduce((a, b) => a + b)).toBe(9_600);
    [0.1, 0.3, 0.6].forEach((p, k) =>
      expect(Math.abs(whole[k]! - 9_600 * p)).toBeLessThan(5 * Math.sqrt(9_600 * p * (1 - p))),
    );
  });
});

describe('Scales', () => {
  const shapes = [3.5, 0.5, 12, 1, 0.25];

  it('that are equal cancel: the very bytes of the Dirichlet', () => {
    const plain = draw(oneColumn(shapes));
    for (const s of [1, 0.1, 7e20]) expect(draw(oneColumn(shapes, Array(5).fill(s)))).toEqual(plain);
  });

  it('count as equal up to the rounding of weight sums, and not beyond', () => {
    const plain = draw(oneColumn(shapes));
    const beside = (difference: number): Float64Array => draw(oneColumn(shapes, [1, 1, 1 - difference, 1, 1]));
    expect(beside((EQUAL_SCALES * 7) / 8)).toEqual(plain);
    expect(beside((EQUAL_SCALES * 9) / 8)).not.toEqual(plain);
  });

  it('of events with one weight are equal so: sums of 0.1 and of 0.01, and their quotients', () => {
    for (let n = 1; n < 3000; n += 7) {
      // A product with an integer is the correctly rounded sum of as many equal terms.
      const [W, V] = [n * 0.1, n * (0.1 * 0.1)];
      expect(Math.abs(V / W / ((0.1 * 0.1) / 0.1) - 1)).toBeLessThan(EQUAL_SCALES);
    }
  });

  it('of outcomes that cannot happen do not count', () => {
    expect(draw(oneColumn([2, 0, 3], [1, 77, 1]))).toEqual(draw(oneColumn([2, 0, 3])));
  });

  it('weight the gammas: with two cells the odds are scaled odds of the Dirichlet, to rounding', () => {
    const plain = draw(oneColumn([2.5, 4]));
    const scaled = draw(oneColumn([2.5, 4], [3, 1]));
    for (let r = 0; r < BLOCK; r++) {
      const odds = (3 * plain[2 * r]!) / plain[2 * r + 1]!;
      expect(Math.abs(scaled[2 * r]! / scaled[2 * r + 1]! / odds - 1)).toBeLessThan(1e-14);
    }
  });

  it('far apart are drawn in logarithms, the same law on both sides of the limit', () => {
    for (const small of [ANCHOR_SCALE * 1.01, ANCHOR_SCALE * 0.99]) {
      // The large cell is of a tiny shape: its odds against the small one, put back to equal scales, are those of a Dirichlet.
      const drawn = many(oneColumn([0.5, 0.02], [small, 1]), 32_000);
      const back = everyNth(drawn, 2).map((p, r) => p / small / (p / small + drawn[2 * r + 1]!));
      expect(distanceFromBeta(back, 0.5, 0.02)).toBeLessThan(LIMIT);
    }
  });
});
