import { readdirSync, readFileSync, rmSync, truncateSync, writeFileSync } from 'node:fs';
import { join } from 'node:path';
import { afterAll, beforeAll, describe, expect, it } from 'vitest';
import { npyBytes } from '../../../src/handover/npy';
import { openBundle, readArray, replicaBlocks, type Bundle } from '../../../src/handover/open-bundle';
import { writeNpz } from '../../../src/handover/write-npz';
import { Cancelled, InputError } from '../../../src/study/input-error';
import { makeBundle } from './make-bundle';
import { hasPython, python } from './python';

let bundle: Bundle;
let out: string;
beforeAll(async () => {
  bundle = openBundle(await makeBundle({ replicas: 7, weighted: true }));
  out = join(bundle.folder, 'all.npz');
});
afterAll(() => rmSync(bundle.folder, { recursive: true }));

describe('an NPZ file', () => {
  it('has the same bytes whenever it is written, and is hashed as it stands', async () => {
    const [first] = await writeNpz(bundle, { out });
    const [second] = await writeNpz(bundle, { out: join(bundle.folder, 'again.npz') });
    expect(second!.sha256).toBe(first!.sha256);
    expect(first!.bytes).toBe(readFileSync(out).length);
  });

  it('reports every block of replicas to the last', async () => {
    const seen: number[][] = [];
    await writeNpz(bundle, { out, replicas: { from: 2, to: 6 }, onProgress: (...at) => seen.push(at) });
    expect(seen.at(-1)).toEqual([4, 4]);
  });

  it('leaves what stood there when it is cancelled or fails, and no temporary file', async () => {
    writeFileSync(out, 'before');
    const signal = AbortSignal.abort();
    await expect(writeNpz(bundle, { out, signal })).rejects.toThrow(Cancelled);
    const stop = new AbortController();
    const late = writeNpz(bundle, { out, signal: stop.signal, onProgress: () => stop.abort() });
    await expect(late).rejects.toThrow(Cancelled);
    const broken = openBundle(await makeBundle());
    truncateSync(join(broken.folder, 'replicas.npy'), 500);
    await expect(writeNpz(broken, { out })).rejects.toThrow(InputError);
    rmSync(broken.folder, { recursive: true });
    expect(readFileSync(out, 'utf8')).toBe('before');
    expect(readdirSync(bundle.folder).filter((name) => name.startsWith('.'))).toEqual([]);
  });

  it('refuses replicas that are not there, and a place that does not exist', async () => {
    await expect(writeNpz(bundle, { out, replicas: { from: 0, to: 8 } })).rejects.toThrow(/it holds 0 to 6/);
    await expect(writeNpz(bundle, { out: join(bundle.folder, 'no', 'a.npz') })).rejects.toThrow(
      /folder does not exist/,
    );
  });

  it.skipIf(!hasPython('numpy'))('holds every array to the bit, read by numpy', async () => {
    await writeNpz(bundle, { out, replicas: { from: 2, to: 6 } });
    const script = `
import json, sys, numpy, zipfile
assert zipfile.ZipFile(sys.argv[1]).testzip() is None
z = numpy.load(sys.argv[1], allow_pickle=False)
print(json.dumps({k: [z[k].shape, z[k].tobytes().hex()] for k in z.files if not k.endswith(".json")}))`;
    const read = python(script, out) as Record<string, [number[], string]>;
    expect(Object.keys(read).sort()).toEqual([...bundle.arrays.keys()].sort());
    for (const [name, [shape, hex]] of Object.entries(read)) {
      if (name === 'replicas') continue;
      const array = readArray(bundle, name)!;
      expect(shape).toEqual(array.shape);
      expect(hex).toBe(npyBytes(array.type, array.values).toString('hex'));
    }
    const [block] = [...replicaBlocks(bundle, 2, 6)];
    expect(read['replicas']).toEqual([[4, 5, 7], npyBytes('<f8', block!.values).toString('hex')]);
  });
});
