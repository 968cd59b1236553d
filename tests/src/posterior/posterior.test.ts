import { describe, expect, it } from 'vitest';
import { matchedDirichlet } from '../../../src/posterior/matched-dirichlet';
import { columnOf, effectiveEntries, hasNoPosterior, posteriorOf } from '../../../src/posterior/posterior';
import { columnMoments } from '../../../src/posterior/share-moments';

const prior = (columns: number, outcomes: number, count = 0.5) => ({
  columns,
  outcomes,
  counts: new Float64Array(columns * outcomes).fill(count),
});

describe('posterior of a column', () => {
  it('unweighted: prior and events add up', () => {
    const posterior = posteriorOf({ events: Float64Array.of(3, 0, 7), weights: null, squares: null }, prior(1, 3));
    expect([...posterior.shape]).toEqual([3.5, 0.5, 7.5]);
    expect(posterior.scale).toBeNull();
    expect([...posterior.effective]).toEqual([10]);
  });

  it('weighted: W^2/V + a0 at scale V/W, and the mean scale V_j/W_j where a cell has no events', () => {
    const cells = {
      events: Float64Array.of(4, 0, 2),
      weights: Float64Array.of(8, 0, 4),
      squares: Float64Array.of(20, 0, 10.5),
    };
    const posterior = posteriorOf(cells, prior(1, 3));
    expect([...posterior.shape]).toEqual([64 / 20 + 0.5, 0.5, 16 / 10.5 + 0.5]);
    expect([...posterior.scale!]).toEqual([20 / 8, 30.5 / 12, 10.5 / 4]);
    expect(posterior.effective[0]).toBeCloseTo(144 / 30.5, 14);
  });

  it('equal weights give the unweighted posterior to the bit, however their sums were rounded', () => {
    const events = Float64Array.of(3, 0, 7, 1e7);
    for (const w of [0.1, 1 / 3, 1e-30, 7e40]) {
      const cells = { events, weights: events.map((n) => n * w), squares: events.map((n) => n * (w * w)) };
      const posterior = posteriorOf(cells, prior(1, 4));
      expect([...posterior.shape]).toEqual([3.5, 0.5, 7.5, 1e7 + 0.5]);
      expect(columnOf(posterior, 0).scale).toBeNull();
      expect(posterior.effective[0]).toBe(1e7 + 10);
    }
  });

  it('weights that differ by one part in a thousand million are not equal', () => {
    const events = Float64Array.of(1, 1);
    const weights = Float64Array.of(1, 1 + 1e-9);
    const posterior = posteriorOf({ events, weights, squares: weights.map((w) => w * w) }, prior(1, 2));
    expect(columnOf(posterior, 0).scale).not.toBeNull();
  });

  it('huge weights do not overflow', () => {
    const cells = {
      events: Float64Array.of(2, 1),
      weights: Float64Array.of(3e150, 1e150),
      squares: Float64Array.of(5e300, 1e300),
    };
    const posterior = posteriorOf(cells, prior(1, 2));
    expect(posterior.shape[0]).toBeCloseTo(9 / 5 + 0.5, 12);
    expect(posterior.effective[0]).toBeCloseTo(16 / 6, 12);
  });

  it('a cell whose weight is not positive keeps its prior alone and is named', () => {
    const cells = {
      events: Float64Array.of(4, 3, 2),
      weights: Float64Array.of(8, -1, 0),
      squares: Float64Array.of(20, 5, 2),
    };
    const posterior = posteriorOf(cells, prior(1, 3));
    expect(posterior.clamped).toEqual([1, 2]);
    expect([...posterior.shape.subarray(1)]).toEqual([0.5, 0.5]);
    expect([...posterior.scale!]).toEqual([2.5, 2.5, 2.5]);
  });

  it('a column without events has its prior, and none at all under a prior of zero', () => {
    const none = { events: new Float64Array(4), weights: new Float64Array(4), squares: new Float64Array(4) };
    const posterior = posteriorOf(none, prior(2, 2));
    expect([...posterior.scale!]).toEqual([1, 1, 1, 1]);
    expect(hasNoPosterior(posterior, 0)).toBe(false);
    expect(hasNoPosterior(posteriorOf(none, prior(2, 2, 0)), 1)).toBe(true);
  });

  it('a column whose total weight is not positive has no effective entries', () => {
    const cells = { events: Float64Array.of(2, 1), weights: Float64Array.of(-3, 1), squares: Float64Array.of(5, 1) };
    expect([...effectiveEntries(cells, 2)]).toEqual([0]);
  });
});

describe('matched Dirichlet', () => {
  it('has the means of the column and its summed variance', () => {
    const shape = Float64Array.of(0.5, 3, 10);
    const scale = Float64Array.of(1, 2, 0.5);
    const posterior = { ...posteriorOf({ events: shape, weights: null, squares: null }, prior(1, 3, 0)), scale };
    const matched = matchedDirichlet(posterior, 0);
    const [mine, true_] = [columnMoments(matched, null), columnMoments(shape, scale)];
    const sum = (values: Float64Array) => values.reduce((a, b) => a + b);
    mine.mean.forEach((m, k) => expect(m).toBeCloseTo(true_.mean[k]!, 13));
    expect(sum(mine.variance) / sum(true_.variance)).toBeCloseTo(1, 12);
  });

  it('is the column itself where weights are equal', () => {
    const posterior = posteriorOf({ events: Float64Array.of(3, 0), weights: null, squares: null }, prior(1, 2));
    expect([...matchedDirichlet(posterior, 0)]).toEqual([3.5, 0.5]);
  });
});
