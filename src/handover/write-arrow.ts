import { closeSync, openSync, writeFileSync } from 'node:fs';
import { setImmediate } from 'node:timers/promises';
import type { Data, DataType, Dictionary, Field, RecordBatch, Vector } from 'apache-arrow';
import type { HandoverOptions } from './handover-options';
import { replicaTable, summaryPlace, summaryTable, type HandoverTable, type TableField } from './handover-table';
import type { Bundle } from './open-bundle';
import { provenance } from './provenance';
import { rangeOut } from './replicas-out';
import { writeWhole, type WrittenFile } from './whole-file';

type Arrow = typeof import('apache-arrow');

/**
 * Writes two Arrow IPC files, not compressed: the ensemble as a long table in record batches, and beside it the summary
 * of the cells. Names are dictionary-encoded; the schema's metadata say where the numbers come from.
 */
export async function writeArrow(bundle: Bundle, options: HandoverOptions): Promise<WrittenFile[]> {
  rangeOut(bundle, options);
  const arrow = await import('apache-arrow');
  const tables = [replicaTable(bundle, options), summaryTable(bundle)];
  const write = async (paths: string[]): Promise<void> => {
    for (const [i, table] of tables.entries()) {
      const fd = openSync(paths[i]!, 'w');
      try {
        await writeTable(arrow, table, provenance(bundle), fd);
      } finally {
        closeSync(fd);
      }
    }
  };
  return writeWhole([options.out, summaryPlace(options.out)], write, options.signal);
}

async function writeTable(
  arrow: Arrow,
  table: HandoverTable,
  metadata: Record<string, string>,
  fd: number,
): Promise<void> {
  // The library's own streams queue without bound: bytes go to the file as they are made instead.
  class FileQueue extends arrow.AsyncByteQueue {
    override write(bytes: Uint8Array): void {
      writeFileSync(fd, new Uint8Array(bytes.buffer, bytes.byteOffset, bytes.byteLength));
    }
  }
  const writer = new arrow.RecordBatchFileWriter();
  writer.reset(new FileQueue());
  for (const batch of batchesOf(arrow, table, metadata)) {
    writer.write(batch);
    await setImmediate();
  }
  writer.finish();
}

function* batchesOf(arrow: Arrow, table: HandoverTable, metadata: Record<string, string>): Generator<RecordBatch> {
  const fields = table.fields.map((field, f) => new arrow.Field(field.name, typeOf(arrow, field, f), false));
  const schema = new arrow.Schema(fields, new Map(Object.entries(metadata)));
  const dictionaries = table.fields.map((field) =>
    field.type === 'label' ? arrow.vectorFromArray(field.labels, new arrow.Utf8()) : null,
  );
  const batch = (rows: number, values: (Int32Array | Float64Array)[]): RecordBatch => {
    const children = values.map((data, f) => dataOf(arrow, fields[f]!, data, dictionaries[f]!));
    return new arrow.RecordBatch(schema, arrow.makeData({ type: new arrow.Struct(fields), length: rows, children }));
  };
  // Without any batch the file would lack its schema.
  if (table.rows === 0)
    yield batch(
      0,
      table.fields.map(({ type }) => (type === 'index' || type === 'label' ? new Int32Array() : new Float64Array())),
    );
  for (const { rows, values } of table.blocks()) yield batch(rows, values);
}

function typeOf(arrow: Arrow, field: TableField, id: number): DataType {
  if (field.type === 'label') return new arrow.Dictionary(new arrow.Utf8(), new arrow.Int32(), id);
  if (field.type === 'index') return new arrow.Int32();
  return field.type === 'count' ? new arrow.Int64() : new arrow.Float64();
}

function dataOf(arrow: Arrow, field: Field, data: Int32Array | Float64Array, dictionary: Vector | null): Data {
  const { type } = field;
  const length = data.length;
  if (dictionary) return arrow.makeData({ type: type as Dictionary, length, data, dictionary });
  return arrow.makeData({
    type,
    length,
    data: arrow.DataType.isInt(type) && type.bitWidth === 64 ? BigInt64Array.from(data, BigInt) : data,
  });
}
