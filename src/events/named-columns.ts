import { InputError } from '../study/input-error';
import type { Need } from './batch';

/** A column of a file that holds several arrays or tables. */
export interface NamedColumn {
  /** The path of an array (`run1/e_tag`), or of a table, a colon, and the name of a member (`events/table:e_tag`). */
  name: string;
  rows: number;
  /** Why the column cannot be read; empty where it can. */
  fault: string;
}

/** The name by which a column can be asked for: its last part where that is clear, else the whole. */
export function shortName(column: NamedColumn, all: readonly NamedColumn[]): string {
  const last = lastPart(column);
  return all.filter((each) => lastPart(each) === last).length === 1 ? last : column.name;
}

/** The readable columns of the greatest length: those of other lengths cannot stand beside them. */
export function longest<T extends NamedColumn>(all: readonly T[]): T[] {
  const readable = all.filter(({ fault }) => fault === '');
  const rows = readable.reduce((most, column) => Math.max(most, column.rows), 0);
  return readable.filter((column) => column.rows === rows);
}

/**
 * The columns of the needs, each by its whole name, with a leading slash or not, or by its last part where only one column
 * ends so. Throws `InputError` for one that is absent, ambiguous or unreadable, and where their lengths differ.
 */
export function findColumns<T extends NamedColumn>(needs: readonly Need[], all: readonly T[], file: string): T[] {
  const columns = needs.map(({ column }) => find(column, all, file));
  const odd = columns.findIndex(({ rows }) => rows !== columns[0].rows);
  if (odd < 0) return columns;
  const told = (i: number) => `"${needs[i].column}" has ${columns[i].rows} rows`;
  throw new InputError(file, `column ${told(0)}, ${told(odd)}`, 'choose columns of the same table');
}

function find<T extends NamedColumn>(asked: string, all: readonly T[], file: string): T {
  const wanted = asked.replace(/^\//, '');
  const exact = all.filter(({ name }) => name === wanted);
  const found = exact.length > 0 ? exact : all.filter((column) => lastPart(column) === wanted);
  if (found.length === 0) {
    const names = all.filter(({ fault }) => fault === '').map(({ name }) => name);
    throw new InputError(file, `no column "${asked}"`, `the columns are ${names.join(', ') || 'none'}`);
  }
  if (found.length > 1) {
    const names = found.map(({ name }) => name).join(', ');
    throw new InputError(file, `several columns end in "${asked}"`, `name one of ${names}`);
  }
  const [column] = found;
  if (column.fault === '') return column;
  throw new InputError(file, `column "${asked}" holds ${column.fault}`, 'choose one of single numbers or texts');
}

function lastPart({ name }: NamedColumn): string {
  return name.slice(Math.max(name.lastIndexOf('/'), name.lastIndexOf(':')) + 1);
}
