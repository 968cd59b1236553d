import type { Drift } from '../../../src/audit/drift';
import { isAbsent, type Measure } from '../../../src/audit/measure';
import { binRange } from '../../../src/study/axis';
import type { AuditView, BinMeasure, ColumnMeasure, DriftView, MeasureView } from '../../bridge';
import type { Audited } from '../analysis';

const COLUMN_MEASURES: readonly ColumnMeasure[] = [
  'effectiveEntries',
  'priorShare',
  'efficiency',
  'acceptance',
  'spillBelow',
  'spillAbove',
  'purity',
  'stability',
  'bias',
  'resolution',
  'slopeBias',
  'drift',
];
const BIN_MEASURES: readonly BinMeasure[] = ['feedIn', 'folded', 'matrixVariance', 'dataVariance', 'background'];
const UNKNOWN: Measure = { value: null, reason: 'not measured' };

/** The audit as the window shows it, lists as typed arrays; `seconds` is left to the caller. */
export function auditView({ measures, flags, deep, reference, analysis }: Audited): AuditView {
  const { tally, recoAxis } = analysis;
  const { first, end } = binRange(recoAxis);
  return {
    flags,
    columnNames: tally.columnNames,
    binNames: tally.outcomeNames.slice(first, end),
    columns: named(COLUMN_MEASURES, (name) => measureView(measures.columns[name] ?? UNKNOWN)),
    bins: named(BIN_MEASURES, (name) => measureView(measures.bins[name] ?? UNKNOWN)),
    matrix: named(['singularValues', 'resolvable'] as const, (name) => measureView(measures.matrix[name] ?? UNKNOWN)),
    reference: reference.contents,
    referenceWords: reference.description,
    noise: deep?.conditioning.noise ?? null,
    drift: deep && driftView(deep.drift),
    seconds: 0,
  };
}

function driftView({ runs, columns }: Drift): DriftView | null {
  if (runs.length === 0) return null;
  const list = (pick: (column: NonNullable<Drift['columns'][number]>) => number): Float64Array =>
    Float64Array.from(columns, (column) => (column ? pick(column) : NaN));
  const distances = new Float64Array(columns.length * runs.length).fill(NaN);
  columns.forEach((column, j) => {
    column?.distances.forEach((distance, r) => (distances[j * runs.length + r] = distance ?? NaN));
  });
  return {
    runs,
    distances,
    pValue: list(({ pValue }) => pValue),
    adjusted: list(({ adjusted }) => adjusted),
    detectable: list(({ detectable }) => detectable),
  };
}

function named<Name extends string, T>(names: readonly Name[], make: (name: Name) => T): Record<Name, T> {
  return Object.fromEntries(names.map((name) => [name, make(name)])) as Record<Name, T>;
}

/** NaN stands for a place without the value, or for an end that a value has not. */
export function measureView(measure: Measure): MeasureView {
  if (isAbsent(measure)) return { value: null, lower: null, upper: null, reason: measure.reason };
  const list = (values: (number | null)[]): Float64Array => Float64Array.from(values, (value) => value ?? NaN);
  const ends = (values: (number | null)[]): Float64Array | null =>
    values.every((value) => value === null) ? null : list(values);
  const { value, lower, upper, absent } = measure;
  return { value: list(value), lower: ends(lower), upper: ends(upper), reason: null, absent };
}
