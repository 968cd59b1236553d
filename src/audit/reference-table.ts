import { InputError } from '../study/input-error';

/** A spectrum given as a table: `content[i]` lies in `[lo[i], hi[i])`, rows by increasing value, gaps allowed. */
export interface ReferenceTable {
  lo: Float64Array;
  hi: Float64Array;
  content: Float64Array;
}

const FIELDS = ['lo', 'hi', 'content'];

/**
 * Reads `lo, hi, content` rows of CSV text. The header line may be left out; empty lines and lines that begin with `#`
 * are passed over. Throws `InputError` at `file:line` for a row that is not three finite numbers with `hi > lo` and a
 * content of 0 or more, that begins before the row above ends, or for a table without content.
 */
export function parseReferenceTable(text: string, file: string): ReferenceTable {
  const rows: number[][] = [];
  text.split(/\r\n|\r|\n/).forEach((line, i) => {
    const fields = line.replace(/^\uFEFF/, '').split(',');
    if (line.trim() === '' || line.startsWith('#') || (rows.length === 0 && isHeader(fields))) return;
    rows.push(parseRow(fields, rows.at(-1), `${file}:${i + 1}`));
  });
  if (!rows.some((row) => row[2]! > 0)) {
    throw new InputError(file, 'no content above 0', 'give rows of lo, hi, content');
  }
  const column = (c: number): Float64Array => Float64Array.from(rows, (row) => row[c]!);
  return { lo: column(0), hi: column(1), content: column(2) };
}

function isHeader(fields: string[]): boolean {
  return fields.length === FIELDS.length && fields.every((field, i) => field.trim().toLowerCase() === FIELDS[i]);
}

function parseRow(fields: string[], before: number[] | undefined, where: string): number[] {
  if (fields.length !== FIELDS.length) {
    throw new InputError(where, `${fields.length} fields`, 'give three: lo, hi, content');
  }
  const row = fields.map((field) => (field.trim() === '' ? NaN : Number(field)));
  const bad = row.findIndex((value) => !Number.isFinite(value));
  if (bad >= 0)
    throw new InputError(where, `${FIELDS[bad]} "${fields[bad]!.trim()}" is no finite number`, 'correct it');
  const [lo, hi, content] = row as [number, number, number];
  if (!(hi > lo)) throw new InputError(where, `hi ${hi} is not above lo ${lo}`, 'give hi > lo');
  if (content < 0) throw new InputError(where, `content ${content} is negative`, 'give 0 or more');
  if (before && lo < before[1]!) {
    throw new InputError(
      where,
      `lo ${lo} lies before the end of the row above (${before[1]})`,
      'list rows that do not overlap, by increasing value',
    );
  }
  return row;
}
