import { columnOf, hasNoPosterior, type Posterior } from '../posterior/posterior';
import { columnMoments } from '../posterior/share-moments';
import type { AuditInput } from './audit-input';
import type { ReferenceSpectrum } from './reference';

/** Why a reference spectrum cannot be folded with this posterior; `null` where it can. */
export function whyNotFolded({ tally, posterior }: AuditInput, { contents }: ReferenceSpectrum): string | null {
  if (!contents.some((s) => s > 0)) return 'the reference spectrum has no content';
  const j = contents.findIndex((s, j) => s > 0 && hasNoPosterior(posterior, j));
  return j < 0 ? null : `column ${tally.columnNames[j]} has content, but no events and a prior of zero`;
}

/** Posterior means and variances of every cell, `[columns, outcomes]`; 0 in a column without posterior. */
export function cellMoments(posterior: Posterior): { mean: Float64Array; variance: Float64Array } {
  const { columns, outcomes } = posterior;
  const mean = new Float64Array(columns * outcomes);
  const variance = new Float64Array(columns * outcomes);
  for (let j = 0; j < columns; j++) {
    if (hasNoPosterior(posterior, j)) continue;
    const { shape, scale } = columnOf(posterior, j);
    const moments = columnMoments(shape, scale);
    mean.set(moments.mean, j * outcomes);
    variance.set(moments.variance, j * outcomes);
  }
  return { mean, variance };
}

/** `sum_j s_j m[j, k]` for each of the outcomes `bins`, over the columns that `counts` lets in. */
export function fold(
  contents: Float64Array,
  matrix: Float64Array,
  bins: readonly number[],
  counts: (column: number) => boolean = () => true,
): Float64Array {
  const folded = new Float64Array(bins.length);
  const outcomes = matrix.length / contents.length;
  for (let j = 0; j < contents.length; j++) {
    const s = contents[j]!;
    if (!(s > 0) || !counts(j)) continue;
    for (let i = 0; i < bins.length; i++) folded[i]! += s * matrix[j * outcomes + bins[i]!]!;
  }
  return folded;
}
