/**
 * Headers and binary tables of FITS files, as bytes.
 * Source: "Definition of the Flexible Image Transport System (FITS)", version 4.0 (IAU FITS Working Group, 2018):
 * 3 (blocks of 2880 bytes), 4.2 (fixed-format values), 7.3 (binary tables with variable-length arrays, `P` descriptors).
 */

/** A keyword of at most 8 characters with its value and a comment. Text is made printable ASCII, as FITS asks. */
export type FitsCard = [keyword: string, value: string | number | boolean, comment?: string];

/** One column: 2-byte (`I`) or 4-byte (`J`) integers, 4-byte (`E`) or 8-byte (`D`) reals. */
export interface FitsColumn {
  name: string;
  type: keyof typeof ITEM_BYTES;
  unit?: string;
  /** One number a row, or one list of numbers a row: a variable-length array. */
  values: ArrayLike<number> | readonly ArrayLike<number>[];
  /** Least and greatest legal value, `TLMINn` and `TLMAXn`. */
  legal?: [least: number, greatest: number];
}

export interface FitsTable {
  name: string;
  /** `EXTVER`: tells tables of one name apart. */
  version: number;
  columns: FitsColumn[];
  cards: FitsCard[];
  /** `COMMENT` texts, each folded onto as many cards as it needs. */
  comments: string[];
}

export const FITS_BLOCK = 2880;
const CARD = 80;
const ITEM_BYTES = { I: 2, J: 4, E: 4, D: 8 };
/** An array descriptor: length and offset in the heap, 32 bits each. */
const DESCRIPTOR_BYTES = 8;
/** Where the value of a fixed-format card ends. */
const VALUE_END = 30;
const SHORTEST_TEXT = 8;
/** A card's text between its quotes, quotes inside counted twice. */
const LONGEST_TEXT = 68;

/** The header of a file whose data are all in extensions. */
export function fitsPrimary(cards: readonly FitsCard[], comments: readonly string[]): Buffer {
  const first: FitsCard[] = [
    ['SIMPLE', true, 'conforms to the FITS standard'],
    ['BITPIX', 8],
    ['NAXIS', 0, 'no data here'],
    ['EXTEND', true, 'the data are in extensions'],
  ];
  return header([...first, ...cards], comments);
}

/** A binary table extension, header and data. Numbers are rounded to the column's type. */
export function fitsTable({ name, version, columns, cards, comments }: FitsTable): Buffer {
  const rows = columns[0]!.values.length;
  const rowBytes = columns.reduce(
    (sum, column) => sum + (isVariable(column) ? DESCRIPTOR_BYTES : ITEM_BYTES[column.type]),
    0,
  );
  const heapBytes = columns.reduce((sum, column) => sum + heapOf(column), 0);
  const structure: FitsCard[] = [
    ['XTENSION', 'BINTABLE', 'binary table'],
    ['BITPIX', 8],
    ['NAXIS', 2],
    ['NAXIS1', rowBytes, 'bytes of a row'],
    ['NAXIS2', rows, 'rows'],
    ['PCOUNT', heapBytes, 'bytes of the variable-length arrays'],
    ['GCOUNT', 1],
    ['TFIELDS', columns.length, 'columns'],
    ['EXTNAME', name],
    ['EXTVER', version],
  ];
  const described = columns.flatMap((column, c) => columnCards(column, c + 1));
  const data = Buffer.alloc(padded(rows * rowBytes + heapBytes));
  fillTable(data, columns, rows, rowBytes);
  return Buffer.concat([header([...structure, ...described, ...cards], comments), data]);
}

function columnCards(column: FitsColumn, n: number): FitsCard[] {
  const { name, type, unit, legal, values } = column;
  const longest = isVariable(column)
    ? Array.from(values as ArrayLike<number>[]).reduce((most, v) => Math.max(most, v.length), 0)
    : 0;
  const cards: FitsCard[] = [
    [`TTYPE${n}`, name],
    [`TFORM${n}`, isVariable(column) ? `P${type}(${longest})` : type],
  ];
  if (unit) cards.push([`TUNIT${n}`, unit]);
  if (legal) cards.push([`TLMIN${n}`, legal[0], 'least legal value'], [`TLMAX${n}`, legal[1], 'greatest legal value']);
  return cards;
}

function fillTable(data: Buffer, columns: readonly FitsColumn[], rows: number, rowBytes: number): void {
  const heapStart = rows * rowBytes;
  let heap = heapStart;
  for (let row = 0, at = 0; row < rows; row++) {
    for (const { type, values } of columns) {
      const value = values[row]!;
      if (typeof value === 'number') {
        at = put(data, type, at, value);
        continue;
      }
      at = data.writeInt32BE(value.length, at);
      at = data.writeInt32BE(heap - heapStart, at);
      for (let i = 0; i < value.length; i++) heap = put(data, type, heap, value[i]!);
    }
  }
}

function put(data: Buffer, type: FitsColumn['type'], at: number, value: number): number {
  if (type === 'I') return data.writeInt16BE(value, at);
  if (type === 'J') return data.writeInt32BE(value, at);
  return type === 'E' ? data.writeFloatBE(value, at) : data.writeDoubleBE(value, at);
}

function isVariable({ values }: FitsColumn): boolean {
  return values.length > 0 && typeof values[0] !== 'number';
}

function heapOf(column: FitsColumn): number {
  if (!isVariable(column)) return 0;
  return (column.values as ArrayLike<number>[]).reduce((sum, { length }) => sum + length * ITEM_BYTES[column.type], 0);
}

function header(cards: readonly FitsCard[], comments: readonly string[]): Buffer {
  const lines = [...cards.map(cardText), ...comments.flatMap(commentLines), 'END'];
  const text = lines.map((line) => line.padEnd(CARD)).join('');
  return Buffer.from(text.padEnd(padded(text.length)), 'latin1');
}

function cardText([keyword, value, comment]: FitsCard): string {
  const told = comment ? ` / ${ascii(comment)}` : '';
  return `${keyword.padEnd(8)}= ${valueText(value)}${told}`.slice(0, CARD);
}

function valueText(value: FitsCard[1]): string {
  const width = VALUE_END - 10;
  if (typeof value === 'boolean') return (value ? 'T' : 'F').padStart(width);
  if (typeof value === 'number') return numberText(value).padStart(width);
  let text = ascii(value).replaceAll("'", "''").slice(0, LONGEST_TEXT);
  // A quote cut in two would open the text again.
  if (/(^|[^'])('')*'$/.test(text)) text = text.slice(0, -1);
  return `'${text.padEnd(SHORTEST_TEXT)}'`.padEnd(width);
}

function numberText(value: number): string {
  if (Number.isInteger(value) && Math.abs(value) < 2 ** 31) return Object.is(value, -0) ? '0' : String(value);
  return value.toExponential().toUpperCase();
}

/** FITS keeps to the printable characters of ASCII: accents go, other characters become `?`. */
function ascii(text: string): string {
  return text
    .normalize('NFKD')
    .replace(/\p{M}/gu, '')
    .replace(/[^\x20-\x7e]/gu, '?');
}

function commentLines(comment: string): string[] {
  const room = CARD - 'COMMENT '.length;
  const lines: string[] = [];
  for (const word of ascii(comment).split(' ')) {
    const last = lines.at(-1);
    if (last !== undefined && last.length + 1 + word.length <= room) lines[lines.length - 1] = `${last} ${word}`;
    else for (let at = 0; at === 0 || at < word.length; at += room) lines.push(word.slice(at, at + room));
  }
  return lines.map((line) => `COMMENT ${line}`);
}

function padded(bytes: number): number {
  return Math.ceil(bytes / FITS_BLOCK) * FITS_BLOCK;
}
