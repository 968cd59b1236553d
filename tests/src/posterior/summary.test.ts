import { describe, expect, it } from 'vitest';
import { cellMarginals, marginalOf, momentsOf } from '../../../src/posterior/marginal';
import { posteriorOf, type Posterior } from '../../../src/posterior/posterior';
import { summarise } from '../../../src/posterior/summary';
import { fastest } from './fastest';
import reference from '../../reference/posterior/values.json';

function unweighted(events: number[], pseudoCount: number): Posterior {
  const counts = new Float64Array(events.length).fill(pseudoCount);
  const cells = { events: Float64Array.from(events), weights: null, squares: null };
  return posteriorOf(cells, { columns: 1, outcomes: events.length, counts });
}

describe('posterior summary (SciPy, tests/reference/posterior/make.py)', () => {
  for (const { name, events, pseudoCount, ...expected } of reference.columns) {
    for (const credibility of [0.68, 0.95] as const) {
      it(`${name}: mean, sd and interval ends at ${credibility} within 1e-8 of SciPy`, () => {
        const summary = summarise(unweighted(events, pseudoCount), Float64Array.from(events), credibility);
        const ends = expected.intervals[`${credibility}`];
        events.forEach((_, k) => {
          const pairs = [
            ['mean', summary.mean[k]!, expected.mean[k]!],
            ['sd', summary.sd[k]!, expected.sd[k]!],
            ['lower', summary.lower[k]!, ends[k]![0]!],
            ['upper', summary.upper[k]!, ends[k]![1]!],
          ] as const;
          for (const [what, actual, value] of pairs) {
            const off = value === 0 ? Math.abs(actual) : Math.abs(actual / value - 1);
            expect(off, `${what} of outcome ${k}: ${actual} for ${value}`).toBeLessThan(1e-8);
          }
        });
        expect(summary.method).toEqual(['exact']);
      });
    }
  }
});

describe('posterior summary, laws', () => {
  it('a cell without events has a lower end of zero at every credibility and kind', () => {
    const events = [0, 3, 9];
    for (const credibility of [0.01, 0.5, 0.999]) {
      for (const kind of ['equal-tailed', 'shortest'] as const) {
        const { lower, upper } = summarise(unweighted(events, 40), Float64Array.from(events), credibility, kind);
        expect(lower[0]).toBe(0);
        expect(upper[0]).toBeGreaterThan(0);
        expect(lower[1]).toBeGreaterThan(0);
      }
    }
  });

  it('the shortest interval is no longer than the equal-tailed one', () => {
    const events = [1, 3, 200];
    const [tailed, shortest] = (['equal-tailed', 'shortest'] as const).map((kind) =>
      summarise(unweighted(events, 0.5), Float64Array.from(events), 0.9, kind),
    );
    events.forEach((_, k) => {
      const width = tailed!.upper[k]! - tailed!.lower[k]!;
      expect(shortest!.upper[k]! - shortest!.lower[k]!).toBeLessThan(width);
    });
  });

  it('a column without posterior holds the limit of a vanishing even prior, and no NaN', () => {
    const summary = summarise(unweighted([0, 0, 0, 0], 0), new Float64Array(4), 0.95);
    expect(summary.method).toEqual(['none']);
    expect([...summary.mean]).toEqual([0.25, 0.25, 0.25, 0.25]);
    expect([...summary.lower, ...summary.upper]).toEqual([0, 0, 0, 0, 1, 1, 1, 1]);
    const near = summarise(unweighted([0, 0, 0, 0], 1e-9), new Float64Array(4), 0.95);
    summary.sd.forEach((sd, k) => expect(near.sd[k]).toBeCloseTo(sd, 8));
  });

  it('an outcome that holds every event of a prior of zero is certain', () => {
    const { mean, sd, lower, upper } = summarise(unweighted([7, 0], 0), Float64Array.of(7, 0), 0.95);
    expect([...mean, ...sd, ...lower, ...upper]).toEqual([1, 0, 0, 0, 1, 0, 1, 0]);
  });

  it('a weighted column says that its intervals are matched; an equally weighted one is exact', () => {
    const prior = { columns: 2, outcomes: 2, counts: new Float64Array(4).fill(0.5) };
    const events = Float64Array.of(10, 20, 10, 20);
    const weights = Float64Array.of(1, 2, 10, 100);
    const squares = Float64Array.of(0.1, 0.2, 30, 700);
    const posterior = posteriorOf({ events, weights, squares }, prior);
    expect(summarise(posterior, events, 0.95).method).toEqual(['exact', 'matched']);
  });

  it('marginals of a weighted column have the exact mean and variance, one by one and all at once', () => {
    const posterior: Posterior = {
      columns: 1,
      outcomes: 3,
      shape: Float64Array.of(0.5, 3, 10),
      scale: Float64Array.of(1, 2, 0.5),
      prior: new Float64Array(3),
      effective: Float64Array.of(13.5),
      clamped: [],
    };
    const cells = cellMarginals(posterior, 0);
    for (let k = 0; k < 3; k++) {
      const one = marginalOf(posterior, 0, [k]);
      expect(one.method).toBe('matched');
      expect(cells[k]!.a / one.a).toBeCloseTo(1, 10);
      expect(cells[k]!.b / one.b).toBeCloseTo(1, 10);
    }
    const rest = momentsOf(marginalOf(posterior, 0, [1, 2]));
    expect(rest.mean + momentsOf(cells[0]!).mean).toBeCloseTo(1, 12);
    expect(rest.variance / momentsOf(cells[0]!).variance).toBeCloseTo(1, 10);
  });

  it('100 columns of 103 outcomes are summarised at a new credibility in under 0.1 s, weighted or not', () => {
    const [columns, outcomes] = [100, 103];
    const events = Float64Array.from({ length: columns * outcomes }, (_, i) =>
      Math.round(1000 * Math.exp(-(((i % outcomes) - Math.floor(i / outcomes)) ** 2) / 50)),
    );
    const prior = { columns, outcomes, counts: new Float64Array(columns * outcomes).fill(0.5) };
    const weights = events.map((n, i) => n * (1 + (i % 5) / 10));
    const squares = events.map((n, i) => n * (1.02 + (i % 7) / 9));
    for (const cells of [
      { events, weights: null, squares: null },
      { events, weights, squares },
    ]) {
      const posterior = posteriorOf(cells, prior);
      expect(fastest(() => summarise(posterior, events, 0.95))).toBeLessThan(100);
    }
  });
});
