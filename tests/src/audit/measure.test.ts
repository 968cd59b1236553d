import { describe, expect, it } from 'vitest';
import { listMeasure } from '../../../src/audit/measure';

describe('lists of a measure', () => {
  it('keeps the order of places, and names those without a value with the reason', () => {
    const measure = listMeasure(
      ['a', 'b', 'c'],
      [{ value: 1, lower: 0.5, upper: 2 }, { reason: 'no events' }, { value: 3, lower: null, upper: null }],
    );
    expect(measure).toEqual({
      value: [1, null, 3],
      lower: [0.5, null, null],
      upper: [2, null, null],
      absent: [{ place: 'b', reason: 'no events' }],
    });
  });

  it('lets no NaN and no infinity out', () => {
    expect(() => listMeasure(['a'], [{ value: NaN, lower: null, upper: null }])).toThrow(RangeError);
    expect(() => listMeasure(['a'], [{ value: 0, lower: 0, upper: Infinity }])).toThrow(RangeError);
  });
});
