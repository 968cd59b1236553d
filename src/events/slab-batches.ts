import { setImmediate as turn } from 'node:timers/promises';
import { stopIfCancelled } from '../study/input-error';
import type { Batch, Need, Unit } from './batch';
import { BatchBuilder } from './batch-builder';
import { SlabTaker, type Slab } from './slab';

/** A stretch of rows: one slab a need. */
export interface Stretch {
  slabs: readonly Slab[];
  rows: number;
}

/**
 * The batches of a unit of `rows` rows out of its stretches. Such formats tell no bytes: the share of the rows passed
 * stands for them. Ends with a batch, be it empty, that tells all rows passed.
 */
export async function* batchesOf(
  unit: Unit,
  needs: readonly Need[],
  rows: number,
  stretches: AsyncIterable<Stretch> | Iterable<Stretch>,
  signal?: AbortSignal,
): AsyncGenerator<Batch> {
  const builder = new BatchBuilder(needs, unit.name);
  const taker = new SlabTaker(needs, builder);
  let passed = 0;
  let told = 0;
  const take = (share: number): Batch => {
    const bytes = Math.round(share * (unit.end - unit.start)) - told;
    told += bytes;
    return builder.take(bytes, passed);
  };
  for await (const stretch of stretches) {
    for (let from = 0; from < stretch.rows;) {
      stopIfCancelled(signal);
      const to = Math.min(stretch.rows, from + taker.room);
      taker.take(stretch.slabs, from, to, passed + 1);
      passed += to - from;
      from = to;
      if (!builder.full) continue;
      yield take(passed / rows);
      // A signal arrives as a message: the event loop must turn for it.
      await turn();
    }
  }
  stopIfCancelled(signal);
  yield take(1);
}

/** Row ranges of a unit each: at most `pieces`, their bounds multiples of `step` rows, none of less than `least` rows. */
export function rowRanges(rows: number, pieces: number, step: number, least: number): { from: number; to: number }[] {
  const count = Math.max(1, Math.min(pieces, Math.floor(rows / Math.max(least, step))));
  const edge = (i: number) => (i === count ? rows : Math.floor((rows * i) / count / step) * step);
  return Array.from({ length: count }, (_, i) => ({ from: edge(i), to: edge(i + 1) }));
}
