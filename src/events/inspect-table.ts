import { setImmediate as turn } from 'node:timers/promises';
import { stopIfCancelled } from '../study/input-error';
import type { FileFacts } from './batch';
import { sizeOf } from './byte-source';
import { Census } from './census';
import { Fields, isBlank } from './fields';
import { LineBlocks, LONGEST_LINE, type Block } from './lines';
import { compressionOf, openBytes } from './open-bytes';
import { readHead, type TableHead } from './table-head';

const LINE_FEED = 10;
const RETURN = 13;

/** Looks at every value of a delimited table. Only lines that are no rows are rejected: a bad number makes a text column. */
export async function inspectTable(path: string, signal?: AbortSignal): Promise<FileFacts> {
  const compression = compressionOf(path, path);
  const head = await readHead(path, path, compression);
  const table = new TableCensus(head);
  const source = openBytes(path, path, compression);
  try {
    const blocks = new LineBlocks(source, path);
    for (let block = await blocks.next(); block !== null; block = await blocks.next()) {
      table.add(block);
      stopIfCancelled(signal);
      await turn();
    }
  } finally {
    source.close();
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

class TableCensus {
  rows = 0;
  rejected = 0;
  readonly columns: Census[];
  private linesToSkip: number;
  private readonly delimiter: number;
  private readonly fields = new Fields();

  constructor({ header, headerLines, delimiter }: TableHead) {
    this.columns = header.map((name) => new Census(name));
    this.linesToSkip = headerLines;
    this.delimiter = delimiter;
  }

  add({ bytes, to }: Block): void {
    for (let from = 0; from < to;) {
      const feed = bytes.indexOf(LINE_FEED, from);
      if (this.linesToSkip > 0) this.linesToSkip--;
      else this.addLine(bytes, from, feed > from && bytes[feed - 1] === RETURN ? feed - 1 : feed);
      from = feed + 1;
    }
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
