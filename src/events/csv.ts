import { InputError } from '../study/input-error';
import type { Batch, Need, Reader, Unit } from './batch';
import { BatchBuilder } from './batch-builder';
import { inspectTable } from './inspect-table';
import { lineUnits, readLines } from './line-units';
import { numberOf } from './number';
import { compressionOf, type Compression } from './open-bytes';
import { positionsOf } from './positions';
import { RowParser, type Layout } from './row-parser';
import { readHead, type TableHead } from './table-head';

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
    return lineUnits({ path, name, format: 'csv', detail }, compression, pieces);
  },

  read: readUnit,

  inspect: inspectTable,
};

function readUnit(unit: Unit, needs: readonly Need[], signal?: AbortSignal): AsyncGenerator<Batch> {
  const { compression, ...layout } = unit.detail as Detail;
  const builder = new BatchBuilder(needs, unit.name);
  const parser = new RowParser(layout, needs, builder, unit.start === 0 ? layout.headerLines : 0);
  return readLines(unit, compression, parser, builder, signal);
}

/** Throws `InputError` for an absent column where the table seems to be separated otherwise or to have no header. */
function checkPresent(column: string, { header, doubt }: TableHead, name: string): void {
  if (header.includes(column)) return;
  if (doubt !== null) {
    throw new InputError(name, `no column "${column}": ${doubt}`, 'separate by comma, tab, semicolon or bar');
  }
  if (header.every((text) => text !== '' && numberOf(text) !== null)) {
    const what = `no column "${column}": the first line reads ${header.join(', ')}, so there is no header`;
    throw new InputError(name, what, 'put a line with the names of the columns first');
  }
}
