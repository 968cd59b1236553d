import { readFileSync } from 'node:fs';
import { describe, expect, it } from 'vitest';
import type { AuditInput } from '../../../src/audit/audit-input';
import {
  drawContents,
  drawShown,
  meanMatrix,
  sweeper,
  type GibbsState,
  type UntaggedModel,
} from '../../../src/audit/augmented-gibbs';
import type { ReferenceSpectrum } from '../../../src/audit/reference';
import {
  ENOUGH_DRAWS,
  LEVELS,
  MIXED,
  rehearse,
  type Rehearsal,
  type RehearsalOptions,
} from '../../../src/audit/rehearsal';
import { PURPOSE, streamOf } from '../../../src/numerics/random';
import { namesOf, tallyOf } from './invented-campaign';
import { inputOf, studyOf } from './invented-study';

interface Moments {
  mean: number[];
  meanError: number[];
  sd: number[];
  sdError: number[];
}
interface Made {
  sampled: {
    shape: number[];
    columns: number;
    outcomes: number;
    shown: number[];
    data: number[];
    priorShape: number;
    rate: number[];
  } & Record<'fixed' | 'free', { contents: Moments; matrix: Record<keyof Moments, number[][]> }>;
  shares: { a: number; b: number; n: number; priorShape: number; rate: number; mean: number; variance: number }[];
}
const made = JSON.parse(
  readFileSync(new URL('../../reference/rehearsal/values.json', import.meta.url), 'utf8'),
) as Made;

const spectrumOf = (contents: number[]): ReferenceSpectrum => ({
  contents: Float64Array.from(contents),
  lowerShares: new Float64Array(contents.length).fill(0.5),
  description: 'invented',
  range: null,
});
function run(input: AuditInput, reference: ReferenceSpectrum, options: RehearsalOptions): Rehearsal {
  const steps = rehearse(input, reference, options);
  for (;;) {
    const step = steps.next();
    if (!step.done) continue;
    if ('reason' in step.value) throw new Error(step.value.reason);
    return step.value;
  }
}

/** Three bins that the detector tells apart well, thinly calibrated, with losses and outer columns. */
const events = [
  [8, 3, 0, 0, 0, 4],
  [2, 12, 4, 0, 0, 3],
  [0, 3, 14, 2, 0, 2],
  [0, 0, 3, 13, 3, 2],
  [0, 0, 0, 4, 9, 3],
];
const thin = inputOf(studyOf(3, 3), tallyOf({ columnNames: namesOf(3), outcomeNames: namesOf(3, true), events }));
const reference = spectrumOf([0, 30, 45, 25, 0]);

describe('The rehearsal over 300 campaigns, true spectra from its own prior and matrices from their posterior', () => {
  const options: RehearsalOptions = {
    repetitions: 300,
    chains: 2,
    sweeps: 400,
    mostSweeps: 12_800,
    truth: 'prior',
    priorShape: 1,
  };
  const found = run(thin, reference, options);

  it('covers at 68 and 95 % as nominal when the matrix is free (4 standard errors)', () => {
    LEVELS.forEach((level, l) => {
      expect(Math.abs(found.overall.free.coverage[l]! - level)).toBeLessThan(4 * found.overall.free.error[l]!);
      for (const { free } of found.columns) {
        const { lower, upper } = free.coverage[l]!;
        expect(lower - 0.02).toBeLessThan(level);
        expect(upper + 0.02).toBeGreaterThan(level);
      }
    });
  });

  it('covers visibly too seldom when the matrix is fixed and the calibration thin', () => {
    LEVELS.forEach((level, l) => {
      expect(level - found.overall.fixed.coverage[l]!).toBeGreaterThan(5 * found.overall.fixed.error[l]!);
      for (const { fixed, free } of found.columns) {
        expect(fixed.coverage[l]!.value).toBeLessThan(free.coverage[l]!.value);
        expect(fixed.width[l]).toBeLessThan(free.width[l]!);
      }
    });
  });

  it('shows that every chain has mixed, and that untagged data narrow a thinly calibrated column', () => {
    expect(found.convergence.unmixed).toBe(0);
    expect(found.convergence.rhat).toBeLessThanOrEqual(MIXED);
    expect(found.convergence.effectiveDraws).toBeGreaterThanOrEqual(ENOUGH_DRAWS);
    expect(found.columns.map(({ column }) => column)).toEqual(['b1', 'b2', 'b3']);
    for (const { narrowed } of found.columns) {
      expect(narrowed).toBeGreaterThan(0.5);
      expect(narrowed).toBeLessThan(1);
    }
  });
});

describe.each(['fixed', 'free'] as const)('The sampler with the matrix %s', (way) => {
  it('has the means and sds of the plain sampler that imputes losses (NumPy, tests/reference/rehearsal; 5 standard errors)', () => {
    const { sampled } = made;
    const model: UntaggedModel = {
      ...sampled,
      shape: Float64Array.from(sampled.shape),
      rate: Float64Array.from(sampled.rate),
    };
    const CHAINS = 20;
    const SWEEPS = 4000;
    const cells = model.columns + model.columns * model.outcomes;
    const { sweep } = sweeper(model, Float64Array.from(sampled.data), way === 'free');
    const chains = Array.from({ length: CHAINS }, (_, c) => {
      const stream = streamOf(c, PURPOSE.test, 40, way === 'free' ? 1 : 0);
      const state: GibbsState = { contents: drawContents(model, stream), matrix: meanMatrix(model) };
      const [sum, squares] = [new Float64Array(cells), new Float64Array(cells)];
      for (let i = 0; i < SWEEPS + 300; i++) {
        sweep(state, stream);
        if (i < 300) continue;
        [...state.contents, ...state.matrix].forEach((x, k) => {
          sum[k]! += x / SWEEPS;
          squares[k]! += (x * x) / SWEEPS;
        });
      }
      return { mean: sum, sd: squares.map((square, k) => Math.sqrt(Math.max(0, square - sum[k]! ** 2))) };
    });
    const { contents, matrix } = sampled[way];
    for (const [quantity, error] of [
      ['mean', 'meanError'],
      ['sd', 'sdError'],
    ] as const) {
      const values = [...contents[quantity], ...matrix[quantity].flat()];
      const errors = [...contents[error], ...matrix[error].flat()];
      values.forEach((value, k) => {
        const own = chains.map((chain) => chain[quantity][k]!);
        const mean = own.reduce((a, b) => a + b, 0) / CHAINS;
        const spread = Math.sqrt(own.reduce((a, x) => a + (x - mean) ** 2, 0) / (CHAINS - 1) / CHAINS);
        expect(Math.abs(mean - value)).toBeLessThanOrEqual(5 * Math.hypot(spread, errors[k]!) + 1e-6);
      });
    }
  });
});

describe('The share of a column that data show, its content integrated out', () => {
  it.each(made.shares)('has the mean and variance of its density by quadrature (mpmath): %j', (c) => {
    const DRAWN = 20_000;
    const stream = streamOf(1, PURPOSE.test, 41, 0);
    const e = Array.from({ length: DRAWN }, () => drawShown(c, c.n, c.priorShape, c.rate, stream));
    const mean = e.reduce((a, b) => a + b, 0) / DRAWN;
    const square = (power: number): number => e.reduce((a, x) => a + (x - c.mean) ** power, 0) / DRAWN;
    expect(Math.abs(mean - c.mean)).toBeLessThan(5 * Math.sqrt(c.variance / DRAWN));
    expect(Math.abs(square(2) - c.variance)).toBeLessThan(5 * Math.sqrt((square(4) - square(2) ** 2) / DRAWN));
  });

  it('is certain where nothing can be hidden, or nothing shown', () => {
    const stream = streamOf(1, PURPOSE.test, 42, 0);
    expect(drawShown({ a: 3, b: 0 }, 5, 1, 0.1, stream)).toBe(1);
    expect(drawShown({ a: 0, b: 2 }, 0, 1, 0.1, stream)).toBe(0);
  });
});

const SHORT: RehearsalOptions = {
  repetitions: 4,
  chains: 2,
  sweeps: 40,
  mostSweeps: 160,
  truth: 'reference',
  priorShape: 1,
};

describe('A rehearsal', () => {
  it('shows its progress after each campaign and can be left at any of them', () => {
    const steps = rehearse(thin, reference, SHORT);
    expect([steps.next().value, steps.next().value]).toEqual([0.25, 0.5]);
    expect(steps.return({ reason: 'cancelled' }).done).toBe(true);
  });

  it('is the same for the same seed, and says where chains have not mixed', () => {
    const once = run(thin, reference, { ...SHORT, mostSweeps: 40 });
    expect(run(thin, reference, { ...SHORT, mostSweeps: 40 })).toEqual(once);
    expect(once.convergence.unmixed).toBe(1);
  });

  it('infers class normalisations on a tag axis, where nothing can be hidden', () => {
    const tags = inputOf(
      studyOf(2, 2, {
        axes: { true: { tags: ['electron', 'pion'] }, reconstructed: { tags: ['x', 'y', 'z'] } },
        lost: 'unrecorded',
      }),
      tallyOf({
        columnNames: ['electron', 'pion'],
        outcomeNames: ['x', 'y', 'z'],
        events: [
          [300, 60, 20],
          [10, 90, 250],
        ],
      }),
    );
    const found = run(tags, spectrumOf([500, 800]), { ...SHORT, repetitions: 20, sweeps: 400, mostSweeps: 1600 });
    expect(found.columns.map(({ column }) => column)).toEqual(['electron', 'pion']);
    expect(found.overall.free.coverage[1]).toBeGreaterThan(0.8);
  });

  it('takes weighted columns by their matched Dirichlet and says so; huge weights stay finite', () => {
    const weights = events.map((row) => row.map((n, k) => n * 1e100 * (k + 1)));
    const squares = events.map((row) => row.map((n, k) => n * 1e200 * (k + 1) ** 2));
    const weighted = inputOf(
      studyOf(3, 3),
      tallyOf({ columnNames: namesOf(3), outcomeNames: namesOf(3, true), events, weights, squares }),
    );
    const found = run(weighted, reference, SHORT);
    expect(found.isMatched).toBe(true);
    expect(run(thin, reference, SHORT).isMatched).toBe(false);
    expect(JSON.stringify(found)).not.toContain('null');
  });

  it('of one column and one bin works, and is absent with the reason without content', () => {
    const one = inputOf(
      studyOf(1, 1),
      tallyOf({
        columnNames: namesOf(1),
        outcomeNames: namesOf(1, true),
        events: [
          [0, 0, 0, 0],
          [1, 30, 0, 3],
          [0, 0, 0, 0],
        ],
      }),
    );
    expect(run(one, spectrumOf([0, 100, 0]), SHORT).columns).toHaveLength(1);
    const none = rehearse(one, spectrumOf([0, 0, 0]), SHORT).next();
    expect(none).toEqual({ done: true, value: { reason: 'the reference spectrum has no content' } });
  });

  it.each([
    [{ repetitions: 0 }, /repetitions/],
    [{ chains: 1 }, /chains/],
    [{ sweeps: 42 }, /sweeps/],
    [{ mostSweeps: 39 }, /mostSweeps/],
    [{ priorShape: 0 }, /shape/],
  ])('refuses options out of range: %j', (wrong, message) => {
    expect(() => rehearse(thin, reference, { ...SHORT, ...wrong }).next()).toThrow(message);
  });
});
