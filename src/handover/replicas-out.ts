import { stopIfCancelled } from '../study/input-error';
import { resolveRange, type HandoverOptions, type ReplicaRange } from './handover-options';
import { replicaBlocks, type Bundle, type ReplicaBlock } from './open-bundle';

/** The replicas a writer is asked for. Throws `InputError` where the bundle has not so many. */
export function rangeOut(bundle: Bundle, options: HandoverOptions): ReplicaRange {
  return resolveRange(options.replicas, bundle.replicas, bundle.folder);
}

/** Their blocks, in order: tells the progress once a block is dealt with, and throws `Cancelled` between blocks. */
export function* replicasOut(bundle: Bundle, options: HandoverOptions): Generator<ReplicaBlock> {
  const { from, to } = rangeOut(bundle, options);
  for (const block of replicaBlocks(bundle, from, to)) {
    stopIfCancelled(options.signal);
    yield block;
    options.onProgress?.(block.first + block.count - from, to - from);
  }
}
