import { describe, expect, it } from 'vitest';
import { bandOrder, bandTitle, outcomeTitle, short } from '../../renderer/words/places';
import type { NumericAxis } from '../../src/study/axis';

const axis: NumericAxis = {
  kind: 'numeric',
  label: '',
  unit: 'MeV',
  spacing: 'linear',
  edges: Float64Array.of(2, 4, 0.1 + 5.9),
};

describe('places in words', () => {
  it('names columns and outcomes with their unit, without binary noise', () => {
    expect([0, 1, 2, 3].map((i) => bandTitle(axis, i).replaceAll('\u202f', ' '))).toEqual([
      'below 2 MeV',
      '2 to 4 MeV',
      '4 to 6 MeV',
      'above 6 MeV',
    ]);
    expect(outcomeTitle(axis, 4)).toBe('lost');
  });

  it('rounds computed edges to a hundredth of their bin, and keeps chosen ones in full', () => {
    expect(short(3.16227766, 0.5)).toBe('3.162');
    expect(short(2.25, 2)).toBe('2.25');
    expect(short(1234.5678, 100)).toBe('1\u202f235');
  });

  it('orders outcomes as they stand in the picture: lost, below, bins, above', () => {
    expect(bandOrder(axis, true)).toEqual([4, 0, 1, 2, 3]);
    expect(bandOrder(axis, false)).toEqual([0, 1, 2, 3]);
  });
});
