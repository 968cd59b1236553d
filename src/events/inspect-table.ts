import { setImmediate as turn } from 'node:timers/promises';
import { stopIfCancelled } from '../study/input-error';
import type { FileFacts } from './batch';
import { sizeOf } from './byte-source';
import { Census } from './census';
import { Fields, isBlank } from './fields';
import { LineBlocks, LONGEST_LINE, type Block } from './lines';
import { compressionOf, openBytes } from './open-bytes';
import { LEFTOVER, NUMBER, OTHER, QuickLines } from './quick-lines';
import { readHead, type TableHead } from './table-head';

const LINE_FEED = 10;
const RETURN = 13;
/** Stands for a number that was left by the quick way, which reads no infinities. */
const LEFT = Infinity;

/** Looks at every value of a delimited table. Only lines that are no rows are rejected: a bad number makes a text column. */
export async function inspectTable(path: string, signal?: AbortSignal): Promise<FileFacts> {
  const compression = compressionOf(path, path);
  const head = await readHead(path, path, compression);
  const table = new TableCensus(head);
  const source = openBytes(path, path, compression);
  try {
    const blocks = new LineBlocks(source, path, table.room);
    for (let block = await blocks.next(); block !== null; block = await blocks.next()) {
      table.add(block);
      stopIfCancelled(signal);
      await turn();
    }
  } finally {
    source.close();
    table.close();
  }
  const { rows, rejected, columns } = table;
  return {
    path,
    format: 'csv',
    bytes: sizeOf(path, path),
    rows,
    rejected,
    columns: columns.map((each) => each.facts()),
  };
}

/** Fields looked at together: enough to make what a look costs vanish, few enough for memory. */
const FIELDS_AT_ONCE = 1 << 19;
const MOST_ROWS_AT_ONCE = 16_384;

class TableCensus {
  rows = 0;
  rejected = 0;
  readonly columns: Census[];
  private linesToSkip: number;
  private readonly delimiter: number;
  private readonly fields = new Fields();
  /** `null` where the system grants no memory for it: then every line goes the careful way. */
  private readonly quick: QuickLines | null;

  constructor({ header, headerLines, delimiter }: TableHead) {
    this.columns = header.map((name) => new Census(name));
    this.linesToSkip = headerLines;
    this.delimiter = delimiter;
    const atOnce = Math.min(MOST_ROWS_AT_ONCE, Math.ceil(FIELDS_AT_ONCE / header.length));
    this.quick = QuickLines.over(new Uint8Array(header.length).fill(OTHER), delimiter, atOnce);
  }

  get room(): Buffer | undefined {
    return this.quick?.room;
  }

  close(): void {
    this.quick?.close();
  }

  add({ bytes, to }: Block): void {
    for (let from = 0; from < to;) {
      if (this.linesToSkip === 0 && this.quick) from = this.addLines(this.quick, bytes, from, to);
      if (from === to) return;
      const feed = bytes.indexOf(LINE_FEED, from);
      if (this.linesToSkip > 0) this.linesToSkip--;
      else this.addLine(bytes, from, feed > from && bytes[feed - 1] === RETURN ? feed - 1 : feed);
      from = feed + 1;
    }
  }

  /** Looks at lines as long as nothing about them is unusual; the begin of the first one not looked at. */
  private addLines(quick: QuickLines, bytes: Uint8Array, from: number, to: number): number {
    const { columns } = this;
    const { kinds, leftovers, numbers } = quick;
    const line = quick.parse(from, to, 0);
    const { rows, left } = quick;
    this.rows += rows;
    for (let at = 0; at < left * LEFTOVER; at += LEFTOVER) {
      const field = leftovers[at + 1];
      if (kinds[field] === NUMBER) numbers[field][leftovers[at]] = LEFT;
      columns[field].add(bytes, leftovers[at + 2], leftovers[at + 3]);
    }
    for (let field = 0; field < columns.length; field++) {
      const column = columns[field];
      if (kinds[field] === NUMBER) {
        const values = numbers[field];
        for (let row = 0; row < rows; row++) if (values[row] !== LEFT) column.addNumber(values[row]);
      } else if (column.countsNumbers) kinds[field] = NUMBER;
    }
    return line;
  }

  private addLine(bytes: Uint8Array, from: number, to: number): void {
    const { columns, fields } = this;
    const found = to - from > LONGEST_LINE ? 0 : fields.cut(bytes, from, to, this.delimiter);
    if (found === 1 && isBlank(bytes, from, to)) return;
    if (found !== columns.length) {
      this.rejected += 1;
      return;
    }
    this.rows += 1;
    for (let i = 0; i < found; i++) columns[i].add(bytes, fields.starts[i], fields.ends[i]);
  }
}
