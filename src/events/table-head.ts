import { InputError } from '../study/input-error';
import { separate } from './delimiter';
import { decode } from './dictionary';
import { Fields } from './fields';
import { LineBlocks, LONGEST_LINE } from './lines';
import { isMissing, parseNumber } from './number';
import { openBytes, type Compression } from './open-bytes';

/** The beginning of a delimited table: its header and what its first lines show. */
export interface TableHead {
  delimiter: number;
  header: string[];
  /** Physical lines up to and with the header. */
  headerLines: number;
  types: ('number' | 'text' | 'unknown')[];
  doubt: string | null;
}

/** Lines behind the header that are looked at for delimiter and types. */
const SAMPLE_LINES = 200;
const LINE_FEED = 10;
const BYTE_ORDER_MARK = [0xef, 0xbb, 0xbf];

/** Reads the head of a table. Throws `InputError` where the file is empty or no text. */
export async function readHead(path: string, name: string, how: Compression): Promise<TableHead> {
  const source = openBytes(path, name, how);
  try {
    const block = await new LineBlocks(source, name).next();
    const lines = block === null ? [] : linesOf(block.bytes, block.to);
    const at = lines.findIndex((line) => line.some((byte) => byte > 32));
    if (at < 0) throw new InputError(name, 'an empty file', 'give a table with a header line');
    if (lines[at].length > LONGEST_LINE) {
      throw new InputError(name, 'not a text table: no end of its first line', 'give a table with a header line');
    }
    return headOf(
      lines[at],
      at + 1,
      lines.slice(at + 1).filter((line) => line.length > 0),
      name,
    );
  } finally {
    source.close();
  }
}

function headOf(headerLine: Uint8Array, headerLines: number, lines: Uint8Array[], name: string): TableHead {
  const { delimiter, doubt } = separate(headerLine, lines);
  const header = namesOf(headerLine.slice(), delimiter);
  if (header === null)
    throw new InputError(`${name}:${headerLines}`, 'a quote in the header is not closed', 'close it');
  return { delimiter, header, headerLines, types: typesOf(lines, delimiter, header.length), doubt };
}

function namesOf(line: Uint8Array, delimiter: number): string[] | null {
  const fields = new Fields();
  const count = fields.cut(line, 0, line.length, delimiter);
  if (count < 0) return null;
  return Array.from({ length: count }, (_, i) => decode(line.subarray(fields.starts[i], fields.ends[i])));
}

function typesOf(lines: Uint8Array[], delimiter: number, columns: number): TableHead['types'] {
  const types: TableHead['types'] = new Array(columns).fill('unknown');
  const fields = new Fields();
  for (const line of lines.map((bytes) => bytes.slice())) {
    if (fields.cut(line, 0, line.length, delimiter) !== columns) continue;
    for (let i = 0; i < columns; i++) {
      const [from, to] = [fields.starts[i], fields.ends[i]];
      if (types[i] === 'text' || isMissing(line, from, to)) continue;
      types[i] = Number.isNaN(parseNumber(line, from, to)) ? 'text' : 'number';
    }
  }
  return types;
}

/** The first lines without their ends and without a byte order mark, copied. */
function linesOf(bytes: Uint8Array, to: number): Uint8Array[] {
  const lines: Uint8Array[] = [];
  let from = BYTE_ORDER_MARK.every((byte, i) => bytes[i] === byte) ? BYTE_ORDER_MARK.length : 0;
  while (from < to && lines.length <= SAMPLE_LINES) {
    const feed = bytes.indexOf(LINE_FEED, from);
    lines.push(bytes.slice(from, bytes[feed - 1] === 13 && feed > from ? feed - 1 : feed));
    from = feed + 1;
  }
  return lines;
}
