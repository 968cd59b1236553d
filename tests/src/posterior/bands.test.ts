import { describe, expect, it } from 'vitest';
import { PURPOSE, streamOf } from '../../../src/numerics/random';
import { simultaneousBand } from '../../../src/posterior/bands';
import { columnMoments } from '../../../src/posterior/share-moments';

const shape = Float64Array.of(40.5, 12.5, 200.5, 0.5, 3.5);
const events = Float64Array.of(40, 12, 200, 0, 3);

function replicasOf(count: number, seed: number): Float64Array {
  const stream = streamOf(seed, PURPOSE.test, 0, 0);
  const replicas = new Float64Array(count * shape.length);
  for (let r = 0; r < count; r++) {
    const draws = shape.map((a) => stream.gamma(a));
    const total = draws.reduce((a, b) => a + b);
    replicas.set(
      draws.map((x) => x / total),
      r * shape.length,
    );
  }
  return replicas;
}

const { mean, variance } = columnMoments(shape, null);
const sd = variance.map(Math.sqrt);

function shareInside(replicas: Float64Array, lower: Float64Array, upper: Float64Array): number {
  const count = replicas.length / shape.length;
  let inside = 0;
  for (let r = 0; r < count; r++) {
    const row = replicas.subarray(r * shape.length, (r + 1) * shape.length);
    if (row.every((p, k) => p >= lower[k]! && p <= upper[k]!)) inside++;
  }
  return inside / count;
}

describe('simultaneous band', () => {
  it('holds whole columns of fresh replicas as often as it says', () => {
    const band = simultaneousBand(replicasOf(20_000, 1), mean, sd, events, 0.9);
    const share = shareInside(replicasOf(20_000, 2), band.lower, band.upper);
    // Four standard errors of two samples of 20 000; the lower edge put to 0 can only add.
    expect(Math.abs(share - 0.9)).toBeLessThan(4 * Math.sqrt((2 * 0.09) / 20_000));
  });

  it('is wider than the interval of one outcome', () => {
    const { deviates } = simultaneousBand(replicasOf(5000, 3), mean, sd, events, 0.9);
    expect(deviates).toBeGreaterThan(1.65);
    expect(deviates).toBeLessThan(5);
  });

  it('stays within 0 and 1 and has no lower edge above 0 without events', () => {
    const { lower, upper } = simultaneousBand(replicasOf(500, 4), mean, sd, events, 0.5);
    expect(lower[3]).toBe(0);
    lower.forEach((edge) => expect(edge).toBeGreaterThanOrEqual(0));
    upper.forEach((edge) => expect(edge).toBeLessThanOrEqual(1));
  });

  it('passes over certain outcomes and needs replicas', () => {
    const band = simultaneousBand(Float64Array.of(1, 0), Float64Array.of(1, 0), new Float64Array(2), events, 0.9);
    expect([...band.lower, ...band.upper, band.deviates]).toEqual([1, 0, 1, 0, 0]);
    expect(() => simultaneousBand(new Float64Array(0), mean, sd, events, 0.9)).toThrow(RangeError);
  });
});
