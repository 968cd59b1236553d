import { copyFileSync, mkdtempSync, readFileSync, rmSync, truncateSync, writeFileSync } from 'node:fs';
import { tmpdir } from 'node:os';
import { join, resolve } from 'node:path';
import fc from 'fast-check';
import { afterAll, beforeAll, describe, expect, it } from 'vitest';
import { npyBytes, npyHeader, readNpy, writeNpy } from '../../../src/handover/npy';
import { InputError } from '../../../src/study/input-error';
import { hasPython, python } from './python';

/** Files made by numpy 1.24.2, see `make.py` beside them. */
const fixture = (name: string): string => resolve(import.meta.dirname, '../../reference/npy', `${name}.npy`);

const sameBits = (a: Float64Array, b: Float64Array): boolean => npyBytes('<f8', a).equals(npyBytes('<f8', b));

let folder: string;
beforeAll(() => (folder = mkdtempSync(join(tmpdir(), 'entasis-npy-'))));
afterAll(() => rmSync(folder, { recursive: true }));

describe('an NPY header', () => {
  it('is byte for byte what numpy writes', async () => {
    for (const name of ['floats', 'integers', 'vector', 'scalar', 'empty']) {
      const { type, shape, values } = readNpy(fixture(name));
      const path = join(folder, `${name}.npy`);
      await writeNpy(path, type, shape, values);
      expect(readFileSync(path).equals(readFileSync(fixture(name))), name).toBe(true);
    }
  });

  it('lets the data start at a multiple of 64 bytes whatever the shape', () => {
    fc.assert(
      fc.property(fc.array(fc.nat(), { maxLength: 12 }), (shape) => {
        const header = npyHeader('<f8', shape);
        expect(header.length % 64).toBe(0);
        expect(header.readUInt16LE(8)).toBe(header.length - 10);
        expect(header.at(-1)).toBe(10);
      }),
    );
  });
});

describe('an NPY array', () => {
  it('reads what numpy wrote, to the bit', () => {
    const floats = readNpy(fixture('floats'));
    expect(floats.shape).toEqual([2, 3]);
    expect([...floats.values]).toEqual([0.1, -0, 1e-320, Math.PI, Infinity, 2 ** 53 + 2]);
    const most = 2 ** 53 - 1;
    expect(readNpy(fixture('integers'))).toMatchObject({ type: '<i8', shape: [1, 2, 2], length: 4 });
    expect([...readNpy(fixture('integers')).values]).toEqual([0, -1, most, -most]);
    expect(readNpy(fixture('scalar'))).toMatchObject({ shape: [], length: 1, values: Float64Array.of(2.5) });
    expect(readNpy(fixture('empty'))).toMatchObject({ shape: [0, 3], length: 0 });
  });

  it('survives the way out and back for any doubles, and over more than one block', async () => {
    const path = join(folder, 'back.npy');
    const values = Float64Array.from({ length: 2 ** 18 + 3 }, (_, i) => i / 7);
    await writeNpy(path, '<f8', [values.length], values);
    expect(sameBits(readNpy(path).values, values)).toBe(true);
    const integers = values.map((_, i) => i - 5);
    await writeNpy(path, '<i8', [integers.length, 1], integers);
    expect(sameBits(readNpy(path).values, integers)).toBe(true);
  });

  it('refuses to write numbers that do not fill the shape, or that are no exact integers', async () => {
    const path = join(folder, 'refused.npy');
    await expect(writeNpy(path, '<f8', [2, 2], new Float64Array(3))).rejects.toThrow(RangeError);
    expect(() => npyBytes('<i8', Float64Array.of(1.5))).toThrow(RangeError);
    expect(() => npyBytes('<i8', Float64Array.of(2 ** 53))).toThrow(RangeError);
    expect(npyBytes('<i8', Float64Array.of(2 ** 53 - 1)).readBigInt64LE()).toBe(2n ** 53n - 1n);
  });

  it('refuses integers beyond 2^53, other orders and other types, in one line that says so', () => {
    expect(() => readNpy(fixture('beyond'), 'a.npy')).toThrow(/^a\.npy: item 1 is an integer beyond 2\^53: /);
    expect(() => readNpy(fixture('fortran'), 'a.npy')).toThrow(/^a\.npy: Fortran order/);
    expect(() => readNpy(fixture('single'), 'a.npy')).toThrow(/^a\.npy: items of type "<f4"/);
    expect(() => readNpy(join(folder, 'absent.npy'), 'a.npy')).toThrow(/^a\.npy: cannot be opened \(ENOENT\)/);
  });

  it('refuses a file that is one byte short or one byte long, and damage at any byte of its header', () => {
    const path = join(folder, 'damaged.npy');
    const whole = readFileSync(fixture('floats'));
    for (let length = 0; length < whole.length; length++) {
      copyFileSync(fixture('floats'), path);
      truncateSync(path, length);
      expect(() => readNpy(path)).toThrow(InputError);
    }
    writeFileSync(path, Buffer.concat([whole, Buffer.of(0)]));
    expect(() => readNpy(path, 'a.npy')).toThrow('a.npy: 177 bytes where the shape (2, 3) asks for 176');
    for (let at = 0; at < 58; at++) {
      const bytes = Buffer.from(whole);
      bytes[at]! ^= 0x15;
      writeFileSync(path, bytes);
      expect(() => readNpy(path)).toThrow(InputError);
    }
  });

  it('refuses absurd shapes without asking for their memory', () => {
    const path = join(folder, 'absurd.npy');
    for (const shape of [[2 ** 40], [2 ** 30, 2 ** 30], [9e15, 9e15, 9e15]]) {
      writeFileSync(path, npyHeader('<f8', shape));
      expect(() => readNpy(path)).toThrow(InputError);
    }
  });
});

describe.skipIf(!hasPython('numpy'))('numpy', () => {
  it('maps what was written, with its values to the bit', async () => {
    const path = join(folder, 'for-numpy.npy');
    const values = Float64Array.of(0.1, -0, 5e-324, NaN, -Infinity, 1 / 3);
    await writeNpy(path, '<f8', [1, 3, 2], values);
    const script = `
import json, sys, numpy
a = numpy.load(sys.argv[1], mmap_mode="r", allow_pickle=False)
print(json.dumps([a.shape, a.dtype.str, a.flags.c_contiguous, a.tobytes().hex()]))`;
    expect(python(script, path)).toEqual([[1, 3, 2], '<f8', true, Buffer.from(values.buffer).toString('hex')]);
    await writeNpy(path, '<i8', [2], Float64Array.of(-3, 2 ** 53 - 1));
    const integers = 'import json, sys, numpy\nprint(json.dumps(numpy.load(sys.argv[1]).tolist()))';
    expect(python(integers, path)).toEqual([-3, Number.MAX_SAFE_INTEGER]);
  });
});
