import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import { shiftContent } from '../../../src/posterior/shift-content';
import type { Axis } from '../../../src/study/axis';

const axis: Axis = { kind: 'numeric', label: '', unit: '', spacing: 'linear', edges: Float64Array.of(0, 1, 3, 4) };

describe('content moved along the reconstructed axis', () => {
  it('is binned again by area, and leaves the window at its ends', () => {
    // below, [0, 1), [1, 3), [3, 4), above, lost; by hand.
    const moved = shiftContent(Float64Array.of(7, 10, 20, 8, 1, 3), axis, 0.5);
    expect([...moved]).toEqual([7, 5, 5 + 15, 5 + 4, 1 + 4, 3]);
    expect([...shiftContent(Float64Array.of(7, 10, 20, 8, 1, 3), axis, -10)]).toEqual([45, 0, 0, 0, 1, 3]);
  });

  it('moves in ln on a log axis', () => {
    const log: Axis = { ...axis, spacing: 'log', edges: Float64Array.of(1, 2, 4, 8) };
    const moved = shiftContent(Float64Array.of(0, 10, 20, 8, 0), log, Math.log(2));
    [0, 0, 10, 20, 8].forEach((n, k) => expect(moved[k]).toBeCloseTo(n, 12));
  });

  it('stays where it is on a tag axis', () => {
    const tags: Axis = { kind: 'tags', label: '', unit: '', tags: ['a', 'b'] };
    expect([...shiftContent(Float64Array.of(1, 2), tags, 1)]).toEqual([1, 2]);
  });

  it('keeps its total, whatever the distance', () => {
    fc.assert(
      fc.property(
        fc.array(fc.double({ min: 0, max: 1e6, noNaN: true }), { minLength: 6, maxLength: 6 }),
        fc.double({ min: -20, max: 20, noNaN: true }),
        (content, distance) => {
          const sum = (values: Iterable<number>) => [...values].reduce((a, b) => a + b, 0);
          const before = sum(content);
          expect(Math.abs(sum(shiftContent(Float64Array.from(content), axis, distance)) - before)).toBeLessThanOrEqual(
            1e-12 * before,
          );
        },
      ),
    );
  });
});
