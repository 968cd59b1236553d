import { BitSet, table as makeTable, type ColumnTable } from 'arquero';

/** A table behind a picture, or of its own. */
export interface TableOf {
  columns: readonly TableColumn[];
  /** One list a column. */
  values: readonly ArrayLike<Entry>[];
}

export interface TableColumn {
  name: string;
  unit?: string;
  /** How a value is shown; numbers are right-aligned by it. */
  show?: (value: number) => string;
}

export type Entry = number | string | null;

export interface Sorting {
  column: number;
  descending: boolean;
}

/** The name with its unit, as it heads a column on the screen and in a file. */
export function heading({ name, unit }: TableColumn): string {
  return unit ? `${name}, ${unit}` : name;
}

/** The rows as an Arquero table whose columns are named by their headings. */
export function arqueroTable({ columns, values }: TableOf): ColumnTable {
  return makeTable(columns.map((column, i) => [heading(column), Array.from(values[i] ?? [])] as [string, Entry[]]));
}

/**
 * Rows that hold every word of `words` somewhere, sorted. Arquero's own expressions are compiled from text, which the
 * page's content policy forbids: its tables take a set of rows and a comparison of rows directly.
 */
export function arranged(table: ColumnTable, words: string, sorting: Sorting | null): ColumnTable {
  const names = table.columnNames();
  const data = table.data() as Record<string, Entry[]>;
  const kept = rowsWith(words, searched(names.map((name) => data[name]!)), table.totalRows());
  const name = sorting ? names[sorting.column] : undefined;
  const order = name === undefined ? null : comparison(data[name]!, sorting!.descending);
  return table.create({ filter: kept, order } as Parameters<ColumnTable['create']>[0]);
}

/** Texts are searched; numbers too where a table has nothing else. */
function searched(columns: Entry[][]): Entry[][] {
  const texts = columns.filter((column) => column.some((entry) => typeof entry === 'string'));
  return texts.length > 0 ? texts : columns;
}

function rowsWith(words: string, columns: Entry[][], rows: number): BitSet | null {
  const sought = words.toLowerCase().split(/\s+/).filter(Boolean);
  if (sought.length === 0) return null;
  const kept = new BitSet(rows);
  for (let row = 0; row < rows; row++) {
    const text = columns.map((column) => String(column[row] ?? '').toLowerCase()).join(' ');
    if (sought.every((word) => text.includes(word))) kept.set(row);
  }
  return kept;
}

/** Numbers by size, texts by their numbers and letters; what is missing comes last either way. */
export function comparison(values: readonly Entry[], descending: boolean): (a: number, b: number) => number {
  const sign = descending ? -1 : 1;
  const collator = new Intl.Collator('en', { numeric: true });
  return (a, b) => {
    const x = values[a] ?? null;
    const y = values[b] ?? null;
    const missing = Number(isMissing(x)) - Number(isMissing(y));
    if (missing !== 0 || isMissing(x)) return missing || a - b;
    const by = typeof x === 'number' && typeof y === 'number' ? x - y : collator.compare(String(x), String(y));
    return by === 0 ? a - b : sign * by;
  };
}

function isMissing(value: Entry): boolean {
  return value === null || (typeof value === 'number' && Number.isNaN(value));
}

/** The table as CSV (RFC 4180), every digit kept, rows in the order shown; what is missing is left empty. */
export function csvText(table: ColumnTable): string {
  return table.reify().toCSV({ format: csvFormats(table) });
}

function csvFormats(table: ColumnTable): Record<string, (value: unknown) => unknown> {
  const finite = (value: unknown) => (typeof value === 'number' && !Number.isFinite(value) ? '' : value);
  return Object.fromEntries(table.columnNames().map((name) => [name, finite]));
}

/** The table with tabs, for a spreadsheet or a letter. */
export function tabbedText(table: ColumnTable): string {
  return table.reify().toCSV({ delimiter: '\t', format: csvFormats(table) });
}
