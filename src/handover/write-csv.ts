import { createWriteStream } from 'node:fs';
import { Readable } from 'node:stream';
import { pipeline } from 'node:stream/promises';
import { csvField, csvRow } from './csv-table';
import type { HandoverOptions } from './handover-options';
import { replicaTable, summaryPlace, summaryTable, type HandoverTable } from './handover-table';
import type { Bundle } from './open-bundle';
import { rangeOut } from './replicas-out';
import { writeWhole, type WrittenFile } from './whole-file';

/** Rows joined to one piece of text: large enough to write fast, small enough to hold. */
const ROWS_AT_ONCE = 8192;

/**
 * Writes two CSV files (RFC 4180, LF): the ensemble as a long table, and beside it the summary of the cells. Numbers
 * are the shortest decimals that read back to the same double.
 */
export async function writeCsv(bundle: Bundle, options: HandoverOptions): Promise<WrittenFile[]> {
  rangeOut(bundle, options);
  const tables = [replicaTable(bundle, options), summaryTable(bundle)];
  const write = async (paths: string[]): Promise<void> => {
    for (const [i, table] of tables.entries()) {
      await pipeline(Readable.from(csvText(table)), createWriteStream(paths[i]!), { signal: options.signal });
    }
  };
  return writeWhole([options.out, summaryPlace(options.out)], write, options.signal);
}

function* csvText({ fields, blocks }: HandoverTable): Generator<string> {
  yield csvRow(fields.map(({ name }) => name));
  // A label is quoted once, not once a row.
  const labels = fields.map((field) => (field.type === 'label' ? field.labels.map(csvField) : null));
  for (const { rows, values } of blocks()) {
    for (let first = 0; first < rows; first += ROWS_AT_ONCE) {
      let text = '';
      for (let row = first; row < Math.min(first + ROWS_AT_ONCE, rows); row++) {
        for (let f = 0; f < fields.length; f++) {
          const value = values[f]![row]!;
          text += (f === 0 ? '' : ',') + (labels[f]?.[value] ?? number(value));
        }
        text += '\n';
      }
      yield text;
    }
  }
}

/** `String` but for the negative zero, whose sign it drops. */
function number(value: number): string {
  return Object.is(value, -0) ? '-0' : String(value);
}
