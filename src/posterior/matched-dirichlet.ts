import { columnOf, type Posterior } from './posterior';
import { columnMoments } from './share-moments';

/**
 * The Dirichlet that stands for column `j` where a sampler further down knows no other: the same means, and the total
 * at which its summed variance is that of the column. Exact for a column of equal weights; else only cell by cell
 * approximate, so it is handed over under this name alone. Throws `RangeError` for a column without posterior.
 */
export function matchedDirichlet(posterior: Pick<Posterior, 'outcomes' | 'shape' | 'scale'>, j: number): Float64Array {
  const { shape, scale } = columnOf(posterior, j);
  const { mean, variance } = columnMoments(shape, scale);
  if (!scale) return shape.slice();
  const spread = variance.reduce((sum, v) => sum + v, 0);
  if (spread === 0) return shape.slice();
  // sum m (1 - m) = sum over pairs of m_k m_l, twice: written so that it loses no digits where one share is near 1.
  const remaining = mean.map((_, k) => mean.reduce((sum, m, l) => (l === k ? sum : sum + m), 0));
  const most = mean.reduce((sum, m, k) => sum + m * remaining[k]!, 0);
  const total = Math.max(most / spread - 1, Number.EPSILON);
  return mean.map((m) => total * m);
}
