import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import { binnerOf } from '../../../src/tally/binner';
import { equalPopulation, followResolution, mergeThin, resolutionCurve } from '../../../src/tally/suggest-axis';

/** Counts of values on edges, by the tally's own binner. */
const countIn = (values: Float64Array) => (edges: Float64Array) => {
  const axis = { kind: 'numeric' as const, label: '', unit: '', spacing: 'linear' as const, edges };
  const places = new Int32Array(values.length);
  binnerOf(axis).places(values, values.length, places);
  const counts = new Float64Array(edges.length + 1);
  places.forEach((place) => counts[place]!++);
  return Promise.resolve(counts.slice(1, -1));
};

/** A seeded linear congruential generator (Lehmer, modulus 2^31 - 1, multiplier 48271): enough to spread test values. */
function uniforms(count: number, seed: number): Float64Array {
  let state = seed;
  return Float64Array.from({ length: count }, () => (state = (state * 48271) % 2147483647) / 2147483647);
}

describe('equal population', () => {
  const window = { from: 0, to: 10, spacing: 'linear' as const };

  it('puts the same number of events in every bin, to the rounding of readable edges', async () => {
    // Exponential values: forty times as dense at the start of the window as at its end.
    const values = uniforms(50_000, 7).map((u) => -2.5 * Math.log(1 - u));
    const edges = await equalPopulation(countIn(values), window, 20);
    const counts = await countIn(values)(Float64Array.from(edges));
    const mean = counts.reduce((a, b) => a + b, 0) / 20;
    expect(counts).toHaveLength(20);
    counts.forEach((count) => expect(Math.abs(count / mean - 1)).toBeLessThan(0.05));
  });

  it('finds the quantiles of values crowded in a millionth of the window', async () => {
    const values = uniforms(10_000, 11).map((u) => 5 + u * 1e-5);
    const edges = await equalPopulation(countIn(values), window, 4);
    const counts = await countIn(values)(Float64Array.from(edges));
    counts.forEach((count) => expect(Math.abs(count - 2500)).toBeLessThan(150));
  });

  it('agrees with the quantiles of sorted values', async () => {
    const values = uniforms(4001, 3).map((u) => 10 * u * u);
    const sorted = [...values].sort((a, b) => a - b);
    const edges = await equalPopulation(countIn(values), window, 8);
    edges.slice(1, -1).forEach((edge, i) => {
      const width = Math.min(edges[i + 1]! - edges[i]!, edges[i + 2]! - edges[i + 1]!);
      expect(Math.abs(edge - sorted[Math.round((4001 * (i + 1)) / 8)]!)).toBeLessThan(0.03 * width);
    });
  });

  it('gives fewer bins where one value repeats too often, and still increasing edges', async () => {
    const values = new Float64Array(1000).fill(3);
    values.set(uniforms(100, 5).map((u) => 10 * u));
    const edges = await equalPopulation(countIn(values), window, 10);
    expect(edges.length).toBeLessThan(11);
    expect(edges.every((edge, i) => i === 0 || edge > edges[i - 1]!)).toBe(true);
  });

  it('puts edges amid the gaps of values that come in steps', async () => {
    const values = Float64Array.from({ length: 900 }, (_, i) => 1 + (i % 9));
    expect(await equalPopulation(countIn(values), window, 3)).toStrictEqual([0, 3.5, 6.5, 10]);
  });

  it('gives even bins in a window without events', async () => {
    expect(await equalPopulation(countIn(new Float64Array(0)), window, 4)).toStrictEqual([0, 2.5, 5, 7.5, 10]);
  });

  it('looks through a log window in equal ratios', async () => {
    const values = uniforms(20_000, 9).map((u) => 10 ** (6 * u - 3));
    const log = { from: 1e-3, to: 1e3, spacing: 'log' as const };
    const edges = await equalPopulation(countIn(values), log, 6);
    edges.forEach((edge, i) => expect(Math.abs(Math.log10(edge) - (i - 3))).toBeLessThan(0.05));
  });

  it('keeps the ends, increases, and never has more bins than asked, whatever the values', async () => {
    await fc.assert(
      fc.asyncProperty(
        fc.array(fc.double({ min: -20, max: 20, noNaN: true }), { maxLength: 200 }),
        fc.integer({ min: 1, max: 30 }),
        async (list, bins) => {
          const edges = await equalPopulation(countIn(Float64Array.from(list)), window, bins);
          expect([edges[0], edges[edges.length - 1]]).toStrictEqual([0, 10]);
          expect(edges.length - 1).toBeLessThanOrEqual(bins);
          expect(edges.every((edge, i) => i === 0 || edge > edges[i - 1]!)).toBe(true);
        },
      ),
      { numRuns: 60, seed: 1 },
    );
  });
});

/** A fine tally of a normal response of width `sigma(t)`, by the error function's difference on each fine bin. */
function normalTally(sigma: (t: number) => number, events = 1e5) {
  const trueEdges = Float64Array.from({ length: 101 }, (_, i) => i);
  const recoEdges = Float64Array.from({ length: 1401 }, (_, i) => -20 + i / 10);
  const values = new Float64Array(100 * 1400);
  for (let j = 0; j < 100; j++) {
    const t = j + 0.5;
    for (let k = 0; k < 1400; k++) {
      const z = (recoEdges[k]! + 0.05 - t) / sigma(t);
      values[j * 1400 + k] = (events * 0.1 * Math.exp((-z * z) / 2)) / (sigma(t) * Math.sqrt(2 * Math.PI));
    }
  }
  return { events: values, trueEdges, recoEdges };
}

describe('following the resolution', () => {
  it('finds the standard deviation of a normal response as its half-width', () => {
    const sigma = (t: number): number => 1 + t / 50;
    for (const { at, width } of resolutionCurve(normalTally(sigma), 'true')) {
      expect(Math.abs(width / sigma(at) - 1)).toBeLessThan(0.01);
    }
  });

  it('makes bins as wide as the local resolution times the factor, on either axis', () => {
    const sigma = (t: number): number => 1 + t / 50;
    for (const of of ['true', 'reconstructed'] as const) {
      const edges = followResolution(normalTally(sigma), of, { from: 0, to: 100 }, 2, 2000);
      for (let i = 0; i + 1 < edges.length; i++) {
        const middle = (edges[i]! + edges[i + 1]!) / 2;
        expect(Math.abs((edges[i + 1]! - edges[i]!) / (2 * sigma(middle)) - 1)).toBeLessThan(0.05);
      }
    }
  });

  it('carries the nearest known width into parts without events', () => {
    const fine = normalTally(() => 2);
    fine.events.fill(0, 50 * 1400);
    const edges = followResolution(fine, 'true', { from: 0, to: 100 }, 5, 2000);
    expect(edges).toStrictEqual([0, 10, 20, 30, 40, 50, 60, 70, 80, 90, 100]);
  });

  it('keeps to the most bins an axis may have, and to one at the least', () => {
    expect(
      followResolution(
        normalTally(() => 2),
        'true',
        { from: 0, to: 100 },
        0.001,
        50,
      ),
    ).toHaveLength(51);
    expect(
      followResolution(
        normalTally(() => 2),
        'true',
        { from: 0, to: 100 },
        900,
        50,
      ),
    ).toStrictEqual([0, 100]);
  });

  it('takes a column at 25 events and not at 24', () => {
    const sized = (events: number) => {
      const values = new Float64Array(10);
      values[4] = events;
      const fine = {
        events: values,
        trueEdges: Float64Array.of(0, 1),
        recoEdges: Float64Array.from({ length: 11 }, (_, i) => i),
      };
      return resolutionCurve(fine, 'true').length;
    };
    expect([sized(24), sized(25)]).toStrictEqual([0, 1]);
  });

  it('says so where no part has events enough', () => {
    const fine = normalTally(() => 2, 1);
    expect(() => followResolution(fine, 'true', { from: 0, to: 100 }, 1, 50)).toThrow(RangeError);
  });
});

describe('merging thin bins', () => {
  const merge = (counts: number[], limit: number): number[] =>
    mergeThin(
      Array.from({ length: counts.length + 1 }, (_, i) => i),
      counts,
      counts,
      limit,
    );

  it('joins a thin bin to its thinner neighbour', () => {
    expect(merge([500, 30, 200, 400], 100)).toStrictEqual([0, 1, 3, 4]);
  });

  it('leaves bins alone that meet the limit exactly, and joins those one below', () => {
    expect(merge([100, 100], 100)).toStrictEqual([0, 1, 2]);
    expect(merge([100, 99], 100)).toStrictEqual([0, 2]);
  });

  it('joins thin bins at both ends inward', () => {
    expect(merge([3, 500, 500, 4], 100)).toStrictEqual([0, 2, 4]);
  });

  it('ends with one bin where all of it is thin', () => {
    expect(merge([3, 4, 5], 100)).toStrictEqual([0, 3]);
  });

  it('counts effective entries where events are weighted', () => {
    // 100 events of weight 1, and 100 events of which one has half the weight: W = 198, V = 99 + 99^2.
    expect(mergeThin([0, 1, 2], [100, 198], [100, 9900], 50)).toStrictEqual([0, 2]);
    expect(mergeThin([0, 1, 2], [100, 198], [100, 198], 50)).toStrictEqual([0, 1, 2]);
  });

  it('keeps every event: merged bins hold what their parts held, and none is thin unless one is left', () => {
    fc.assert(
      fc.property(fc.array(fc.nat(300), { minLength: 1, maxLength: 40 }), (counts) => {
        const edges = merge(counts, 100);
        const contents = edges.slice(1).map((to, i) => counts.slice(edges[i], to).reduce((a, b) => a + b, 0));
        expect(contents.reduce((a, b) => a + b, 0)).toBe(counts.reduce((a, b) => a + b, 0));
        expect(contents.length === 1 || contents.every((content) => content >= 100)).toBe(true);
      }),
      { seed: 2 },
    );
  });
});
