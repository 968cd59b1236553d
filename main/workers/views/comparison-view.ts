import { FALSE_DISCOVERIES, compareTallies, type ColumnComparison, type Comparison } from '../../../src/audit/compare';
import { isAbsent, type Measure } from '../../../src/audit/measure';
import { matrixSampler, modelOf } from '../../../src/handover/analyse';
import { bundleTally } from '../../../src/handover/bundle-tally';
import { openBundle } from '../../../src/handover/open-bundle';
import { normalQuantile } from '../../../src/numerics/normal';
import { binRange } from '../../../src/study/axis';
import type { ComparisonView } from '../../bridge';
import type { Audited } from '../analysis';

/** The study as it stands against a bundle of the same axes. Throws `InputError` where their axes differ. */
export function comparisonView({ analysis, reference }: Audited, folder: string): ComparisonView {
  const bundle = openBundle(folder);
  const other = modelOf(bundle.study, bundleTally(bundle), folder);
  const comparison = compareTallies(analysis, other, reference, matrixSampler, folder);
  const { columnNames, outcomeNames } = analysis.tally;
  const { value, lower, upper } = comparison.differences;
  const known = comparison.columns.map((column) => ('reason' in column ? null : column));
  const list = (pick: (column: ColumnComparison) => number): Float64Array =>
    Float64Array.from(known, (column) => (column ? pick(column) : NaN));
  const adjusted = list((column) => column.adjusted);
  return {
    columnNames,
    outcomeNames,
    names: [analysis.study.title, bundle.study.title],
    difference: value,
    lower,
    upper,
    distance: list(({ distance }) => distance),
    pValue: list(({ pValue }) => pValue),
    adjusted,
    differing: [...adjusted.keys()].filter((j) => adjusted[j]! <= FALSE_DISCOVERIES),
    folded: foldedView(comparison, outcomeNames.slice(...windowOf(analysis)), analysis.study.credibility),
    seconds: 0,
  };
}

function windowOf({ recoAxis }: Audited['analysis']): [number, number] {
  const { first, end } = binRange(recoAxis);
  return [first, end];
}

/** Folded spectra with the sd of their difference, from its normal interval; `null` where nothing can be folded. */
function foldedView({ folded }: Comparison, binNames: string[], credibility: number): ComparisonView['folded'] {
  const { first, second, change } = folded;
  if (isAbsent(first) || isAbsent(second) || isAbsent(change)) return null;
  const reach = 2 * normalQuantile((1 + credibility) / 2);
  const sd = Float64Array.from(change.value, (_, i) => ((change.upper[i] ?? NaN) - (change.lower[i] ?? NaN)) / reach);
  return { binNames, first: valuesOf(first), second: valuesOf(second), sd };
}

function valuesOf(measure: Exclude<Measure, { value: null }>): Float64Array {
  return Float64Array.from(measure.value, (value) => value ?? NaN);
}
