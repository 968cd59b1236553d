import { readFileSync } from 'node:fs';
import { join } from 'node:path';
import { setImmediate } from 'node:timers/promises';
import type { Dataset, File } from 'h5wasm/node';
import type { Axis } from '../study/axis';
import { stopIfCancelled } from '../study/input-error';
import type { HandoverOptions } from './handover-options';
import type { NpyType } from './npy';
import { arrayBlocks, readArray, type Bundle, type ReplicaBlock } from './open-bundle';
import { provenance } from './provenance';
import { rangeOut, replicasOut } from './replicas-out';
import { writeWhole, type WrittenFile } from './whole-file';

/** Chunks hold whole replicas, as many as come near this size: one at least. */
const CHUNK_BYTES = 2 ** 18;
/** Variable-length UTF-8 text. */
const TEXT = 'S';

/**
 * Writes one HDF5 file: the arrays under the names they have in the folder (`tally/counts`, `replicas`, ...), the names
 * of columns and outcomes as `columns` and `outcomes`, the edges or tags of the axes under `axes`, the documents
 * `manifest.json` and `study.json` as texts. Root attributes say where the numbers come from. `replicas` is chunked by
 * replica and holds those asked for; its attribute `first_replica` is the number of the first, counted from 0.
 *
 * The library works in the calling thread: between blocks other work gets its turn.
 */
export async function writeHdf5(bundle: Bundle, options: HandoverOptions): Promise<WrittenFile[]> {
  const { from, to } = rangeOut(bundle, options);
  const { default: hdf5 } = await import('h5wasm/node');
  // Without it, a failed write passes in silence.
  (await hdf5.ready).activate_throwing_error_handler();
  const write = async ([path]: string[]): Promise<void> => {
    const file = new hdf5.File(path!, 'w');
    try {
      writeDocuments(file, bundle);
      for (const name of groupsOf(bundle)) file.create_group(name);
      writeAxis(file, 'axes/true', bundle.axes.true);
      writeAxis(file, 'axes/reconstructed', bundle.axes.reconstructed);
      for (const name of bundle.arrays.keys()) {
        stopIfCancelled(options.signal);
        await writeArray(file, bundle, name);
      }
      const replicas = await writeSlabs(file, bundle, 'replicas', to - from, replicasOut(bundle, options));
      replicas.create_attribute('first_replica', from);
    } finally {
      file.close();
    }
  };
  return writeWhole([options.out], write, options.signal);
}

function writeDocuments(file: File, bundle: Bundle): void {
  for (const [key, value] of Object.entries(provenance(bundle))) file.create_attribute(key, value, null, TEXT);
  file.create_dataset({ name: 'columns', data: bundle.columns, dtype: TEXT });
  file.create_dataset({ name: 'outcomes', data: bundle.outcomes, dtype: TEXT });
  for (const name of ['manifest.json', 'study.json']) {
    file.create_dataset({ name, data: readFileSync(join(bundle.folder, name), 'utf8'), dtype: TEXT });
  }
}

function groupsOf(bundle: Bundle): Set<string> {
  const folders = [...bundle.arrays.keys()].filter((name) => name.includes('/')).map((name) => name.split('/')[0]!);
  return new Set([...folders, 'axes']);
}

function writeAxis(file: File, name: string, axis: Axis): void {
  const dataset =
    axis.kind === 'tags'
      ? file.create_dataset({ name, data: axis.tags, dtype: TEXT })
      : file.create_dataset({ name, data: axis.edges });
  const spacing = axis.kind === 'tags' ? 'tags' : axis.spacing;
  for (const [key, text] of Object.entries({ label: axis.label, unit: axis.unit, spacing })) {
    dataset.create_attribute(key, text, null, TEXT);
  }
}

async function writeArray(file: File, bundle: Bundle, name: string): Promise<void> {
  if (name === 'replicas') return;
  const [first] = bundle.manifest.arrays[`${name}.npy`]!.axes;
  if (first === 'run') {
    const runs = bundle.arrays.get(name)!.shape[0]!;
    await writeSlabs(file, bundle, name, runs, arrayBlocks(bundle, name, 0, runs));
    return;
  }
  const { type, shape, values } = readArray(bundle, name)!;
  describe(file.create_dataset({ name, data: itemsOf(type, values), shape }), bundle, name);
}

/** Writes an array slab by slab: memory is bounded by a block, not by the array. */
async function writeSlabs(
  file: File,
  bundle: Bundle,
  name: string,
  length: number,
  blocks: Generator<ReplicaBlock>,
): Promise<Dataset> {
  const { type, shape } = bundle.arrays.get(name)!;
  const rest = shape.slice(1);
  const bytes = rest.reduce((product, n) => product * n, Float64Array.BYTES_PER_ELEMENT);
  const chunk = Math.max(1, Math.min(length, Math.floor(CHUNK_BYTES / bytes)));
  const data = itemsOf(type, new Float64Array());
  const empty = { shape: [0, ...rest], maxshape: [null, ...rest], chunks: [chunk, ...rest] };
  const dataset = file.create_dataset({ name, data, ...empty });
  dataset.resize([length, ...rest]);
  let at = 0;
  for (const { count, values } of blocks) {
    dataset.write_slice([[at, at + count], ...rest.map((): [] => [])], itemsOf(type, values));
    at += count;
    await setImmediate();
  }
  describe(dataset, bundle, name);
  return dataset;
}

function describe(dataset: Dataset, bundle: Bundle, name: string): void {
  const { axes, holds } = bundle.manifest.arrays[`${name}.npy`]!;
  dataset.create_attribute('axes', axes, null, TEXT);
  dataset.create_attribute('holds', holds, null, TEXT);
}

function itemsOf(type: NpyType, values: Float64Array): Float64Array | BigInt64Array {
  return type === '<i8' ? BigInt64Array.from(values, BigInt) : values;
}
