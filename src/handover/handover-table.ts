import { extname } from 'node:path';
import type { HandoverOptions } from './handover-options';
import { readCells, type Bundle } from './open-bundle';
import { replicasOut } from './replicas-out';

/**
 * A table that leaves the program in columns: blocks of rows in order, one array a field.
 * `index` is a 32-bit integer, `count` an integer of up to 2^53, `number` a double, `label` a code into `labels`.
 */
export interface HandoverTable {
  fields: TableField[];
  rows: number;
  blocks(): Generator<TableBlock>;
}

export type TableField = { name: string; type: 'index' | 'count' | 'number' } | LabelField;
export interface LabelField {
  name: string;
  type: 'label';
  labels: string[];
}

export interface TableBlock {
  rows: number;
  /** One a field, `rows` long: `Int32Array` for `index` and `label`, `Float64Array` for the others. */
  values: (Int32Array | Float64Array)[];
}

/** The ensemble as a long table: `replica`, `column`, `outcome`, `p`, in the order of the array. */
export function replicaTable(bundle: Bundle, options: HandoverOptions): HandoverTable {
  const codes = cellCodes(bundle);
  const cells = codes.column.length;
  const { from, to } = options.replicas ?? { from: 0, to: bundle.replicas };
  function* blocks(): Generator<TableBlock> {
    for (const { first, count, values } of replicasOut(bundle, options)) {
      const replica = new Int32Array(values.length).map((_, i) => first + Math.floor(i / cells));
      yield { rows: values.length, values: [replica, tiled(codes.column, count), tiled(codes.outcome, count), values] };
    }
  }
  const fields: TableField[] = [
    { name: 'replica', type: 'index' },
    ...cellFields(bundle),
    { name: 'p', type: 'number' },
  ];
  return { fields, rows: (to - from) * cells, blocks };
}

/** One row a cell: what was counted, the posterior's parameters, its mean, sd and interval. Names as in `cells.csv`. */
export function summaryTable(bundle: Bundle): HandoverTable {
  const codes = cellCodes(bundle);
  const fields = cellFields(bundle);
  const values: (Int32Array | Float64Array)[] = [codes.column, codes.outcome];
  for (const [array, name] of Object.entries(SUMMARY)) {
    if (!bundle.arrays.has(array)) continue;
    fields.push({ name, type: array === 'tally/counts' ? 'count' : 'number' });
    values.push(readCells(bundle, array));
  }
  function* blocks(): Generator<TableBlock> {
    yield { rows: codes.column.length, values };
  }
  return { fields, rows: codes.column.length, blocks };
}

/** Where the summary table goes that belongs to a long table: beside it, with the same ending. */
export function summaryPlace(out: string): string {
  const ending = extname(out);
  return `${out.slice(0, out.length - ending.length)}-summary${ending}`;
}

const SUMMARY: Record<string, string> = {
  'tally/counts': 'events',
  'tally/weights': 'weight',
  'tally/squares': 'squared_weight',
  'posterior/shape': 'shape',
  'posterior/scale': 'scale',
  'posterior/mean': 'mean',
  'posterior/sd': 'sd',
  'posterior/lower': 'lower',
  'posterior/upper': 'upper',
};

function cellFields(bundle: Bundle): TableField[] {
  return [
    { name: 'column', type: 'label', labels: bundle.columns },
    { name: 'outcome', type: 'label', labels: bundle.outcomes },
  ];
}

function cellCodes(bundle: Bundle): { column: Int32Array; outcome: Int32Array } {
  const outcomes = bundle.outcomes.length;
  const column = new Int32Array(bundle.columns.length * outcomes).map((_, i) => Math.floor(i / outcomes));
  return { column, outcome: column.map((_, i) => i % outcomes) };
}

function tiled(codes: Int32Array, times: number): Int32Array {
  const all = new Int32Array(codes.length * times);
  for (let t = 0; t < times; t++) all.set(codes, t * codes.length);
  return all;
}
