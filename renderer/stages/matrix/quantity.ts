import { binRange } from '../../../src/study/axis';
import type { KnownMatrix } from '../../bench/results.svelte';
import type { Extent } from '../../draw/scale';

export type Quantity = 'mean' | 'sd' | 'relative' | 'width' | 'events' | 'effective' | 'replica';

export const QUANTITIES: readonly { name: Quantity; title: string; unit: string }[] = [
  { name: 'mean', title: 'Mean', unit: 'probability' },
  { name: 'sd', title: 'Standard deviation', unit: 'probability' },
  { name: 'relative', title: 'Relative sd', unit: 'of the mean' },
  { name: 'width', title: 'Interval width', unit: 'probability' },
  { name: 'events', title: 'Events', unit: 'events' },
  { name: 'effective', title: 'Effective entries', unit: 'entries' },
  { name: 'replica', title: 'One replica', unit: 'probability' },
];

/** `[columns, outcomes]`: the quantity in every cell. A replica that has not come yet is the mean. */
export function cellsOf(quantity: Quantity, matrix: KnownMatrix, replica: ArrayLike<number> | null): ArrayLike<number> {
  const { posterior, tally } = matrix;
  switch (quantity) {
    case 'mean':
      return posterior.mean;
    case 'sd':
      return posterior.sd;
    case 'relative':
      return posterior.sd.map((sd, i) => (posterior.mean[i]! > 0 ? sd / posterior.mean[i]! : NaN));
    case 'width':
      return posterior.upper.map((upper, i) => upper - posterior.lower[i]!);
    case 'events':
      return tally.events;
    case 'effective':
      return effectiveCells(matrix);
    case 'replica':
      return replica ?? posterior.mean;
  }
}

function effectiveCells({ tally }: KnownMatrix): Float64Array {
  const { weights, squares } = tally;
  if (!weights || !squares) return tally.events;
  return weights.map((w, i) => (w > 0 && squares[i]! > 0 ? w ** 2 / squares[i]! : 0));
}

export type Spanned = Extent & { over: boolean };

/** A log scale begins at the least cell above zero, at most this many decades down. */
const MOST_DECADES = 6;

/**
 * The colours span the cells of the window: one outer cell that holds nearly everything, as `below` to `lost` often
 * does, would leave the others pale. What lies above has the last colour; `over` says that there is such a cell.
 */
export function colourExtent(
  cells: ArrayLike<number>,
  kind: Extent['kind'],
  { axes, posterior }: KnownMatrix,
): Spanned {
  const columns = binRange(axes.true);
  const bins = binRange(axes.reconstructed);
  let least = Infinity;
  let greatest = 0;
  let over = 0;
  for (let i = 0; i < cells.length; i++) {
    const x = cells[i]!;
    if (!Number.isFinite(x) || x <= 0) continue;
    over = Math.max(over, x);
    const column = Math.floor(i / posterior.outcomes);
    const outcome = i % posterior.outcomes;
    if (column < columns.first || column >= columns.end || outcome < bins.first || outcome >= bins.end) continue;
    if (x < least) least = x;
    if (x > greatest) greatest = x;
  }
  if (greatest === 0) return { kind, from: kind === 'log' ? 0.1 : 0, to: 1, over: over > 1 };
  if (kind === 'linear') return { kind, from: 0, to: greatest, over: over > greatest };
  const from = Math.max(least, greatest / 10 ** MOST_DECADES);
  return { kind, from: from < greatest ? from : greatest / 10, to: greatest, over: over > greatest };
}

/** A cell is doubtful where its interval is wider than this share of its mean. */
export const DOUBTFUL = 0.5;

export function doubtfulCells({ posterior }: KnownMatrix): Uint8Array {
  return Uint8Array.from(posterior.mean, (mean, i) =>
    posterior.upper[i]! - posterior.lower[i]! > DOUBTFUL * mean ? 1 : 0,
  );
}
