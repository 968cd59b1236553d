import type { Dataset, File } from 'h5wasm/node';
import { npyBytes } from './npy';
import { arrayBlocks, type Bundle } from './open-bundle';
import type { ReplicaRange } from './handover-options';

/**
 * Compares the arrays of an HDF5 file with those of a bundle, to the bit and in blocks: for the one format whose bytes
 * are not reproducible. Returns what differs first, or `null`.
 */
export async function differenceOfHdf5(path: string, bundle: Bundle, range: ReplicaRange): Promise<string | null> {
  const { default: hdf5 } = await import('h5wasm/node');
  // Without it, a failed read gives whatever stood in memory.
  (await hdf5.ready).activate_throwing_error_handler();
  const file = new hdf5.File(path, 'r');
  try {
    for (const [name, { shape }] of bundle.arrays) {
      const { from, to } = name === 'replicas' ? range : { from: 0, to: shape[0]! };
      if (!sameArray(file, bundle, name, from, to)) return name;
    }
    return null;
  } finally {
    file.close();
  }
}

function sameArray(file: File, bundle: Bundle, name: string, from: number, to: number): boolean {
  const { type, shape } = bundle.arrays.get(name)!;
  const dataset = file.get(name) as Dataset | null;
  if (dataset?.shape?.join() !== [to - from, ...shape.slice(1)].join()) return false;
  if (dataset.dtype !== (type === '<i8' ? '<q' : '<d')) return false;
  for (const { first, count, values } of arrayBlocks(bundle, name, from, to)) {
    const read = dataset.slice([[first - from, first - from + count]]) as Float64Array | BigInt64Array;
    const bytes = Buffer.from(read.buffer, read.byteOffset, read.byteLength);
    if (!bytes.equals(npyBytes(type, values))) return false;
  }
  return true;
}
