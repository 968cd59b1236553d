import { Fields } from './fields';

const COMMA = 44;
const TAB = 9;
const SEMICOLON = 59;
const BAR = 124;
const CANDIDATES = [COMMA, TAB, SEMICOLON, BAR];

/** What separates the fields of a table, or why that cannot be told. */
export interface Separation {
  delimiter: number;
  /** A sentence where header and lines disagree or something else seems to separate the fields. */
  doubt: string | null;
}

/**
 * Finds the delimiter of a table out of its header and its first lines: comma, tab, semicolon or bar, the one that cuts
 * the header into two fields or more and the most lines into just as many; then the one with more fields.
 */
export function separate(header: Uint8Array, lines: readonly Uint8Array[]): Separation {
  const counts = CANDIDATES.map((delimiter) => ({ delimiter, ...agreement(header, lines, delimiter) }));
  const useful = counts.filter(({ fields }) => fields > 1);
  if (useful.length === 0) return { delimiter: COMMA, doubt: doubtOfOneColumn(header, lines) };
  useful.sort((a, b) => b.agreeing - a.agreeing || b.fields - a.fields);
  const best = useful[0];
  return { delimiter: best.delimiter, doubt: best.agreeing === 0 ? doubtOfLines(best, lines) : null };
}

function agreement(header: Uint8Array, lines: readonly Uint8Array[], delimiter: number) {
  const fields = count(header, delimiter);
  const agreeing = lines.filter((line) => count(line, delimiter) === fields).length;
  return { fields, agreeing };
}

function doubtOfOneColumn(header: Uint8Array, lines: readonly Uint8Array[]): string | null {
  for (const delimiter of CANDIDATES) {
    const fields = usual(lines, delimiter);
    if (fields > 1) return `the header reads as one column, the lines as ${fields} separated by ${nameOf(delimiter)}`;
  }
  const words = wordsOf(header);
  if (words > 1 && lines.every((line) => wordsOf(line) === words)) {
    return `the header reads as one column; ${words} seem to be separated by blanks`;
  }
  const colons = count(header, COLON);
  if (colons > 1 && lines.every((line) => count(line, COLON) === colons)) {
    return `the header reads as one column; ${colons} seem to be separated by colons`;
  }
  return null;
}

const COLON = 58;

function doubtOfLines(header: { delimiter: number; fields: number }, lines: readonly Uint8Array[]): string | null {
  const other = CANDIDATES.find((d) => d !== header.delimiter && usual(lines, d) === header.fields);
  if (other === undefined) return null;
  return `the header is separated by ${nameOf(header.delimiter)}, the lines by ${nameOf(other)}`;
}

/** The number of fields that every one of the lines has, 0 where they differ or there is no line. */
function usual(lines: readonly Uint8Array[], delimiter: number): number {
  if (lines.length === 0) return 0;
  const first = count(lines[0], delimiter);
  return lines.every((line) => count(line, delimiter) === first) ? first : 0;
}

const cutter = new Fields();

/** Fields of a line; 0 where a quote is not closed. */
function count(line: Uint8Array, delimiter: number): number {
  return Math.max(0, cutter.cut(line.slice(), 0, line.length, delimiter));
}

function wordsOf(line: Uint8Array): number {
  let words = 0;
  for (let p = 0; p < line.length; p++) if (!isBlank(line[p]) && (p === 0 || isBlank(line[p - 1]))) words++;
  return words;
}

function isBlank(byte: number): boolean {
  return byte === 32 || byte === TAB;
}

function nameOf(delimiter: number): string {
  if (delimiter === COMMA) return 'commas';
  if (delimiter === TAB) return 'tabs';
  return delimiter === BAR ? 'bars' : 'semicolons';
}
