import { describe, expect, it } from 'vitest';
import { parseCutValue, showCutValue } from '../../renderer/stages/events/cut-value';

describe('cuts', () => {
  it('take a number where the text reads as one, a list for "in"', () => {
    expect(parseCutValue(' \u22122.5 ', '>=')).toBe(-2.5);
    expect(parseCutValue('good', '=')).toBe('good');
    expect(parseCutValue('1, 2,3', 'in')).toEqual([1, 2, 3]);
    expect(showCutValue(['a', 'b'])).toBe('a, b');
  });
});
