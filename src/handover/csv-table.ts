import { table } from 'arquero';

/** A table as CSV text with LF line ends; `null` is an empty field, numbers are written to the last digit. */
export function csvTable(columns: Record<string, ArrayLike<unknown>>, header = true): string {
  return `${table(columns).toCSV({ header })}\n`;
}

/** One row of CSV, fields quoted where they must be (RFC 4180). */
export function csvRow(fields: readonly (string | number | null)[]): string {
  return `${fields.map(csvField).join(',')}\n`;
}

export function csvField(field: string | number | null): string {
  const text = field === null ? '' : String(field);
  return /[",\r\n]/.test(text) ? `"${text.replaceAll('"', '""')}"` : text;
}
