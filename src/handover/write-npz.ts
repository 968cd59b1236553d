import { createReadStream, createWriteStream, statSync } from 'node:fs';
import { join } from 'node:path';
import { Readable } from 'node:stream';
import { pipeline } from 'node:stream/promises';
import type { ZipFile } from 'yazl';
import type { HandoverOptions, ReplicaRange } from './handover-options';
import { npyBytes, npyHeader, NPY_ITEM_BYTES } from './npy';
import type { Bundle } from './open-bundle';
import { rangeOut, replicasOut } from './replicas-out';
import { writeWhole, type WrittenFile } from './whole-file';

/** Every entry bears the same time, the first a zip knows, so that the same bundle gives the same bytes. */
const ENTRY = { mtime: new Date(1980, 0, 1), forceDosTimestamp: true, compress: false, mode: 0o644 };

/**
 * Writes one NPZ file: a zip, not compressed, of the bundle's arrays under their names in the folder, beside
 * `manifest.json` and `study.json`. `numpy.load` opens it; zip64 is used where an entry or the file needs it.
 */
export async function writeNpz(bundle: Bundle, options: HandoverOptions): Promise<WrittenFile[]> {
  const range = rangeOut(bundle, options);
  const write = async ([path]: string[]): Promise<void> => {
    const { ZipFile } = await import('yazl');
    const zip = new ZipFile();
    const output = zip.outputStream as Readable;
    zip.on('error', (error: Error) => output.destroy(error));
    const sources: Readable[] = [];
    for (const entry of entriesOf(bundle, range, options)) addEntry(zip, entry, sources);
    zip.end();
    try {
      await pipeline(output, createWriteStream(path!), { signal: options.signal });
    } finally {
      sources.forEach((source) => source.destroy());
    }
  };
  return writeWhole([options.out], write, options.signal);
}

interface Entry {
  name: string;
  size: number;
  open(): Readable;
}

function* entriesOf(bundle: Bundle, range: ReplicaRange, options: HandoverOptions): Generator<Entry> {
  const others = [...bundle.arrays.keys()].filter((name) => name !== 'replicas').map((name) => `${name}.npy`);
  for (const name of ['manifest.json', 'study.json', ...others]) {
    const path = join(bundle.folder, name);
    yield { name, size: statSync(path).size, open: () => createReadStream(path) };
  }
  const shape = [range.to - range.from, bundle.columns.length, bundle.outcomes.length];
  const header = npyHeader('<f8', shape);
  const size = header.length + shape.reduce((product, n) => product * n, NPY_ITEM_BYTES);
  yield { name: 'replicas.npy', size, open: () => Readable.from(replicaBytes(header, bundle, options)) };
}

function* replicaBytes(header: Buffer, bundle: Bundle, options: HandoverOptions): Generator<Buffer> {
  yield header;
  for (const { values } of replicasOut(bundle, options)) yield npyBytes('<f8', values);
}

function addEntry(zip: ZipFile, entry: Entry, sources: Readable[]): void {
  zip.addReadStreamLazy(entry.name, { ...ENTRY, size: entry.size }, (give) => {
    const source = entry.open();
    // yazl pipes, and a pipe does not carry errors on.
    source.on('error', (error) => zip.emit('error', error));
    sources.push(source);
    give(null, source);
  });
}
