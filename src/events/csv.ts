import { setImmediate as turn } from 'node:timers/promises';
import { InputError, stopIfCancelled } from '../study/input-error';
import type { Batch, Need, Reader, Unit } from './batch';
import { BatchBuilder } from './batch-builder';
import { sizeOf } from './byte-source';
import { inspectTable } from './inspect-table';
import { LineBlocks, lineStart } from './lines';
import { parseNumber } from './number';
import { compressionOf, openBytes, type Compression } from './open-bytes';
import { positionsOf } from './positions';
import { RowParser, type Layout } from './row-parser';
import { readHead, type TableHead } from './table-head';

/** A smaller piece of a plain file is not worth a worker of its own. */
export const LEAST_PIECE = 4_194_304;

interface Detail extends Layout {
  compression: Compression;
}

/**
 * Delimited text with a header (delimiter found out), plain, gzip or zstd. Every physical line behind the header is one
 * row, one reject, or blank and passed over. A plain file is cut into ranges of whole lines; a compressed one is read by
 * one worker.
 */
export const csv: Reader = {
  format: 'csv',
  places: 'line',

  async columns(path) {
    const { header, types } = await readHead(path, path, compressionOf(path, path));
    return header.map((name, i) => ({ name, type: types[i] }));
  },

  async plan(path, name, needs, pieces) {
    const compression = compressionOf(path, name);
    const head = await readHead(path, name, compression);
    for (const { column } of needs) checkPresent(column, head, name);
    const positions = positionsOf(needs, head.header, name);
    if (head.doubt !== null) throw new InputError(name, head.doubt, 'separate all lines by the same sign');
    const { delimiter, header, headerLines } = head;
    const detail: Detail = { delimiter, header, headerLines, positions, compression };
    const size = sizeOf(path, name);
    const count = compression === 'none' ? Math.max(1, Math.min(pieces, Math.floor(size / LEAST_PIECE))) : 1;
    return cut(size, count).map(([start, end]) => ({ path, name, format: 'csv', start, end, detail }));
  },

  read: readUnit,

  inspect: inspectTable,
};

async function* readUnit(unit: Unit, needs: readonly Need[], signal?: AbortSignal): AsyncGenerator<Batch> {
  const { path, name } = unit;
  const detail = unit.detail as Detail;
  const builder = new BatchBuilder(needs, name);
  const parser = new RowParser(detail, needs, builder, unit.start === 0 ? detail.headerLines : 0);
  const source = openBytes(path, name, detail.compression, ...wholeLines(unit));
  let told = 0;
  const take = (): Batch => {
    const bytes = source.consumed - told;
    told = source.consumed;
    return builder.take(bytes, parser.place);
  };
  try {
    const blocks = new LineBlocks(source, name);
    for (let block = await blocks.next(); block !== null; block = await blocks.next()) {
      for (let at = 0; at < block.to;) {
        at = parser.parse(block.bytes, at, block.to);
        if (!builder.full) continue;
        stopIfCancelled(signal);
        yield take();
        // A signal arrives as a message: the event loop must turn for it.
        await turn();
      }
    }
    stopIfCancelled(signal);
    yield take();
  } finally {
    source.close();
  }
}

/** The bytes of the lines that begin in the unit's range. */
function wholeLines({ path, name, start, end }: Unit): [number, number] {
  const size = sizeOf(path, name);
  return [lineStart(path, name, start, size), end >= size ? size : lineStart(path, name, end, size)];
}

function cut(size: number, count: number): [number, number][] {
  const edge = (i: number) => Math.floor((size * i) / count);
  return Array.from({ length: count }, (_, i) => [edge(i), edge(i + 1)]);
}

/** Throws `InputError` for an absent column where the table seems to be separated otherwise or to have no header. */
function checkPresent(column: string, { header, doubt }: TableHead, name: string): void {
  if (header.includes(column)) return;
  if (doubt !== null) {
    throw new InputError(name, `no column "${column}": ${doubt}`, 'separate by comma, tab, semicolon or bar');
  }
  const encoder = new TextEncoder();
  const isNumber = (text: string) => !Number.isNaN(parseNumber(encoder.encode(text), 0, text.length));
  if (header.every(isNumber)) {
    const what = `no column "${column}": the first line reads ${header.join(', ')}, so there is no header`;
    throw new InputError(name, what, 'put a line with the names of the columns first');
  }
}
