import type { KnownMatrix } from '../../bench/results.svelte';
import { count } from '../../words/number';
import { bandTitle, outcomeTitle } from '../../words/places';
import type { TableOf } from '../../words/table';

/** Every cell of the matrix as a row, column by column. */
export function cellsTable({ posterior, tally, axes }: KnownMatrix): TableOf {
  const { columns, outcomes } = posterior;
  const across = Array.from({ length: columns }, (_, j) => bandTitle(axes.true, j));
  const up = Array.from({ length: outcomes }, (_, k) => outcomeTitle(axes.reconstructed, k));
  return {
    columns: [
      { name: 'True' },
      { name: 'Reconstructed' },
      { name: 'Events', show: count },
      { name: 'Mean' },
      { name: 'Sd' },
      { name: 'Lower' },
      { name: 'Upper' },
      { name: 'Prior pseudo-count' },
    ],
    values: [
      across.flatMap((title) => Array<string>(outcomes).fill(title)),
      across.flatMap(() => up),
      tally.events,
      posterior.mean,
      posterior.sd,
      posterior.lower,
      posterior.upper,
      posterior.prior,
    ],
  };
}
