import { describe, expect, it } from 'vitest';
import { arqueroTable, arranged, csvText, tabbedText } from '../../renderer/words/table';

const table = arqueroTable({
  columns: [{ name: 'Column' }, { name: 'Bias', unit: 'MeV' }],
  values: [
    ['10 to 12 MeV', 'above 60 MeV', '2 to 4 MeV', 'below 2 MeV'],
    [0.5, NaN, -1.25, null],
  ],
});
const rows = (words: string, sorting: Parameters<typeof arranged>[2]) => [...arranged(table, words, sorting).indices()];

describe('tables', () => {
  it('sort numbers by size and names by their numbers, what is missing last either way', () => {
    expect(rows('', { column: 1, descending: false })).toEqual([2, 0, 1, 3]);
    expect(rows('', { column: 1, descending: true })).toEqual([0, 2, 1, 3]);
    expect(rows('', { column: 0, descending: false })).toEqual([2, 0, 1, 3]);
    expect(rows('', null)).toEqual([0, 1, 2, 3]);
  });

  it('keep the rows that hold every word', () => {
    expect(rows('mev TO', null)).toEqual([0, 2]);
    expect(rows('nothing', null)).toEqual([]);
  });

  // RFC 4180: a field with a comma is quoted.
  it('are written as CSV in the order shown, with units in the head and nothing for what is missing', () => {
    const text = csvText(arranged(table, '', { column: 1, descending: false }));
    expect(text.trim().split('\n')).toEqual([
      'Column,"Bias, MeV"',
      '2 to 4 MeV,-1.25',
      '10 to 12 MeV,0.5',
      'above 60 MeV,',
      'below 2 MeV,',
    ]);
  });

  it('are copied with tabs', () => {
    expect(tabbedText(arranged(table, '10', null)).trim()).toBe('Column\tBias, MeV\n10 to 12 MeV\t0.5');
  });

  it('need no code made from text, which the content policy of the page forbids', () => {
    const made = globalThis.Function;
    globalThis.Function = function () {
      throw new Error('code from text');
    } as unknown as FunctionConstructor;
    try {
      expect(csvText(arranged(table, 'mev', { column: 0, descending: true }))).toContain('10 to 12');
    } finally {
      globalThis.Function = made;
    }
  });
});
