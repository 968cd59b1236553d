import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import { resolveAxis } from '../../../src/study/study';
import { binnerOf } from '../../../src/tally/binner';

const placesOf = (edges: number[], values: number[]): number[] => {
  const axis = resolveAxis({ label: '', unit: '', edges, spacing: 'linear' });
  const places = new Int32Array(values.length);
  binnerOf(axis).places(Float64Array.from(values), values.length, places);
  return [...places];
};

/** The definition, one edge at a time. */
const byDefinition = (edges: number[], x: number): number =>
  Number.isNaN(x) ? -1 : edges.filter((edge) => x >= edge).length;

describe('a binner', () => {
  it('takes bins as [lo, hi): an edge belongs to the bin above it, the top edge is above', () => {
    expect(placesOf([0, 1, 5, 10], [-0.1, 0, 0.99, 1, 5, 9.99, 10, 11, NaN, Infinity, -Infinity])).toEqual([
      0, 1, 1, 2, 3, 3, 4, 4, -1, 4, 0,
    ]);
  });

  it('agrees with the definition on any edges and any values, edges and their neighbours included', () => {
    const edgeLists = fc
      .uniqueArray(fc.double({ noNaN: true, noDefaultInfinity: true, min: -1e300, max: 1e300 }), {
        minLength: 2,
        maxLength: 60,
      })
      .map((edges) => edges.map((edge) => edge + 0).sort((a, b) => a - b))
      .filter((edges) => new Set(edges).size === edges.length);
    fc.assert(
      fc.property(edgeLists, fc.array(fc.double(), { maxLength: 40 }), (edges, values) => {
        const all = [
          ...values,
          ...edges,
          ...edges.map((edge) => edge * (1 + 2 ** -52)),
          ...edges.map((edge) => edge * (1 - 2 ** -53)),
        ];
        expect(placesOf(edges, all)).toEqual(all.map((x) => byDefinition(edges, x)));
      }),
      { numRuns: 300 },
    );
  });

  it('agrees with the definition on edges over twelve decades, many in one grid cell', () => {
    const edges = Array.from({ length: 200 }, (_, i) => 1e-6 * 10 ** ((12 * i) / 199));
    const values = edges.flatMap((edge) => [edge, edge * 1.0000001, edge * 0.9999999]);
    expect(placesOf(edges, values)).toEqual(values.map((x) => byDefinition(edges, x)));
  });
});
