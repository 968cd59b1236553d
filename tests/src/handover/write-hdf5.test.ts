import { createHash } from 'node:crypto';
import { readdirSync, readFileSync, rmSync, truncateSync, writeFileSync } from 'node:fs';
import { join } from 'node:path';
import { afterAll, beforeAll, describe, expect, it } from 'vitest';
import { npyBytes } from '../../../src/handover/npy';
import { openBundle, readArray, replicaBlocks, type Bundle } from '../../../src/handover/open-bundle';
import { writeHdf5 } from '../../../src/handover/write-hdf5';
import { Cancelled, InputError } from '../../../src/study/input-error';
import { makeBundle } from './make-bundle';
import { hasPython, python } from './python';

let bundle: Bundle;
let out: string;
beforeAll(async () => {
  const axes = {
    true: { label: 'Énergie ΔE', unit: 'µeV', from: 0, to: 1, bins: 96 },
    reconstructed: { tags: ['électron', 'muon "µ"', 'γ'] },
  };
  bundle = openBundle(await makeBundle({ replicas: 2400, weighted: true, runs: 3, axes }));
  out = join(bundle.folder, 'all.h5');
});
afterAll(() => rmSync(bundle.folder, { recursive: true }));

describe('an HDF5 file', () => {
  it.skipIf(!hasPython('h5py'))('holds every array to the bit, with names, axes and seed, read by h5py', async () => {
    await writeHdf5(bundle, { out, replicas: { from: 2, to: 2395 } });
    const script = `
import hashlib, json, sys, h5py
f = h5py.File(sys.argv[1], "r")
arrays = {}
f.visititems(lambda n, d: arrays.update({n: d}) if isinstance(d, h5py.Dataset) else None)
text = lambda d: [t.decode() for t in d[()]] if d.shape else d[()].decode()
numbers = {n: [d.shape, d.dtype.str, hashlib.sha256(d[()].tobytes()).hexdigest(), list(d.attrs["axes"]), d.chunks]
           for n, d in arrays.items() if d.dtype != object and not n.startswith("axes/")}
texts = {n: text(d) for n, d in arrays.items() if d.dtype == object}
axis = f["axes/true"]
print(json.dumps({"numbers": numbers, "texts": texts, "edges": axis[()].tolist(), "axis": dict(axis.attrs),
                  "root": dict(f.attrs), "first": int(f["replicas"].attrs["first_replica"])}))`;
    const read = python(script, out) as {
      numbers: Record<string, [number[], string, string, string[], number[] | null]>;
      texts: Record<string, unknown>;
      edges: number[];
      axis: Record<string, string>;
      root: Record<string, string>;
      first: number;
    };
    expect(Object.keys(read.numbers).sort()).toEqual([...bundle.arrays.keys()].sort());
    for (const [name, [shape, type, sha256, axes]] of Object.entries(read.numbers)) {
      expect(axes, name).toEqual(bundle.manifest.arrays[`${name}.npy`]!.axes);
      if (name === 'replicas') continue;
      const array = readArray(bundle, name)!;
      expect([shape, type, sha256], name).toEqual([array.shape, array.type, sha(npyBytes(array.type, array.values))]);
    }
    const wanted = [...replicaBlocks(bundle, 2, 2395)].map(({ values }) => npyBytes('<f8', values));
    expect(wanted.length).toBeGreaterThan(1);
    const [shape, type, sha256, , chunks] = read.numbers['replicas']!;
    expect([shape, type, sha256, read.first]).toEqual([[2393, 98, 4], '<f8', sha(Buffer.concat(wanted)), 2]);
    expect(chunks).toEqual([83, 98, 4]);
    expect(read.texts['columns']).toEqual(bundle.columns);
    expect(read.texts['outcomes']).toEqual(bundle.outcomes);
    expect(read.texts['axes/reconstructed']).toEqual(['électron', 'muon "µ"', 'γ']);
    expect(read.texts['study.json']).toBe(readFileSync(join(bundle.folder, 'study.json'), 'utf8'));
    expect(read.axis).toEqual({ label: 'Énergie ΔE', unit: 'µeV', spacing: 'linear' });
    expect(read.edges).toEqual([...(bundle.axes.true as { edges: Float64Array }).edges]);
    expect(read.root).toMatchObject({ seed: '77', study_fingerprint: bundle.manifest.study.fingerprint });
  });

  it('leaves what stood there when it is cancelled in the middle, or its bundle is damaged', async () => {
    writeFileSync(out, 'before');
    const stop = new AbortController();
    const late = writeHdf5(bundle, { out, signal: stop.signal, onProgress: () => stop.abort() });
    await expect(late).rejects.toThrow(Cancelled);
    const damaged = openBundle(await makeBundle());
    truncateSync(join(damaged.folder, 'replicas.npy'), 500);
    await expect(writeHdf5(damaged, { out })).rejects.toThrow(InputError);
    rmSync(damaged.folder, { recursive: true });
    expect(readFileSync(out, 'utf8')).toBe('before');
    expect(readdirSync(bundle.folder).filter((name) => name.startsWith('.'))).toEqual([]);
  });

  it('can be written without any replica', async () => {
    const [file] = await writeHdf5(bundle, { out, replicas: { from: 0, to: 0 } });
    expect(file!.bytes).toBeGreaterThan(0);
  });
});

describe('a place that cannot be written', () => {
  it('is one clear line', async () => {
    const place = join(bundle.folder, 'absent', 'a.h5');
    await expect(writeHdf5(bundle, { out: place })).rejects.toThrow(InputError);
  });
});

function sha(bytes: Buffer): string {
  return createHash('sha256').update(bytes).digest('hex');
}
