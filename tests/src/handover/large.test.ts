import { closeSync, openSync, readFileSync, rmSync, writeFileSync, writeSync } from 'node:fs';
import { join } from 'node:path';
import { afterAll, beforeAll, describe, expect, it } from 'vitest';
import { convertBundle } from '../../../main/convert';
import { formatOf, type FormatId } from '../../../src/handover/formats';
import type { Manifest } from '../../../src/handover/manifest';
import { npyBytes, npyHeader } from '../../../src/handover/npy';
import { arrayPath, openBundle } from '../../../src/handover/open-bundle';
import { makeBundle } from './make-bundle';
import { hasPython, python } from './python';

/**
 * Files beyond 2 GiB (where 32-bit lengths break) or any other size: `ENTASIS_LARGE_GIB=2.2 npx vitest run large`.
 * Skipped, and reported so, without that variable: it takes minutes and twice the size on disk.
 */
const GIB = Number(process.env['ENTASIS_LARGE_GIB'] ?? 0);
const FORMATS = (process.env['ENTASIS_LARGE_FORMATS'] ?? 'npz,hdf5').split(',') as FormatId[];
const COLUMNS = 102;
const OUTCOMES = 103;
const CELLS = COLUMNS * OUTCOMES;
const REPLICAS = Math.ceil((GIB * 2 ** 30) / (CELLS * 8)) + 1;
/** "Peak memory under 700 MB" for an ensemble of any size. */
const MOST_MEMORY = 700e6;
const MINUTES = 60_000;

describe.skipIf(GIB === 0 || !hasPython('numpy', 'h5py'))(`an ensemble of ${GIB} GiB`, () => {
  let folder: string;
  beforeAll(async () => {
    const range = { unit: 'MeV', from: 0, to: 1 };
    const axes = { true: { ...range, bins: COLUMNS - 2 }, reconstructed: { ...range, bins: OUTCOMES - 3 } };
    folder = await makeBundle({ replicas: 0, axes });
    writeReplicas(folder);
  }, 10 * MINUTES);
  afterAll(() => rmSync(folder, { recursive: true }));

  /** Python that checks an array `a` of any kind, replica by replica, and prints how many are as they were made. */
  const check = (open: string): string => `
import json, sys, numpy
${open}
cells = numpy.arange(${CELLS}).reshape(${COLUMNS}, ${OUTCOMES}) / ${CELLS}
good = 0
for first in range(0, a.shape[0], 500):
    block = numpy.asarray(a[first:first + 500])
    replica = numpy.arange(first, first + len(block))[:, None, None]
    good += int((block == replica + cells).all(axis=(1, 2)).sum())
print(json.dumps([list(a.shape), good]))`;
  const right = [[REPLICAS, COLUMNS, OUTCOMES], REPLICAS];

  it(
    'is mapped whole by numpy as NPY',
    () => {
      const path = arrayPath(folder, 'replicas');
      expect(python(check('a = numpy.load(sys.argv[1], mmap_mode="r")'), path)).toEqual(right);
    },
    10 * MINUTES,
  );

  it.each(FORMATS)(
    'is written as %s in bounded memory and read back whole',
    async (id) => {
      expect(openBundle(folder).replicas).toBe(REPLICAS);
      const out = join(folder, '..', `large-${process.pid}${formatOf(id).endings[0]}`);
      const started = performance.now();
      let peak = 0;
      const watch = setInterval(() => (peak = Math.max(peak, process.memoryUsage().rss)), 200);
      const files = await convertBundle({ bundle: folder, to: id, out }).finally(() => clearInterval(watch));
      console.log(`${id}: ${(performance.now() - started) / 1e3} s, peak ${peak / 1e6} MB, ${files[0]!.bytes} bytes`);
      try {
        expect(peak).toBeLessThan(MOST_MEMORY);
        const reader = READERS[id];
        if (reader) expect(python(check(reader), out)).toEqual(right);
      } finally {
        files.forEach(({ path }) => rmSync(path));
      }
    },
    30 * MINUTES,
  );
});

/** How the usual reader opens `a` lazily. An NPZ's member is read as a stream: it cannot be mapped. */
const READERS: Partial<Record<FormatId, string>> = {
  hdf5: 'import h5py\na = h5py.File(sys.argv[1], "r")["replicas"]',
  npz: `
import zipfile
from numpy.lib import format
class Stream:
    def __init__(self, file):
        self.file = file
        assert format.read_magic(file) == (1, 0)
        self.shape, fortran, self.dtype = format.read_array_header_1_0(file)
        assert not fortran
    def __getitem__(self, part):
        count = min(part.stop, self.shape[0]) - part.start
        data = self.file.read(count * self.shape[1] * self.shape[2] * 8)
        return numpy.frombuffer(data, self.dtype).reshape(count, *self.shape[1:])
a = Stream(zipfile.ZipFile(sys.argv[1]).open("replicas.npy"))`,
};

function writeReplicas(folder: string): void {
  const shape = [REPLICAS, COLUMNS, OUTCOMES];
  const fd = openSync(arrayPath(folder, 'replicas'), 'w');
  writeSync(fd, npyHeader('<f8', shape));
  const cells = new Float64Array(CELLS).map((_, i) => i / CELLS);
  for (let r = 0; r < REPLICAS; r++)
    writeSync(
      fd,
      npyBytes(
        '<f8',
        cells.map((p) => r + p),
      ),
    );
  closeSync(fd);
  const path = join(folder, 'manifest.json');
  const manifest = JSON.parse(readFileSync(path, 'utf8')) as Manifest;
  manifest.replicas = REPLICAS;
  manifest.arrays['replicas.npy']!.shape = shape;
  writeFileSync(path, JSON.stringify(manifest));
}
