import { readdirSync, readFileSync, rmSync, writeFileSync } from 'node:fs';
import { join } from 'node:path';
import { afterAll, beforeAll, describe, expect, it } from 'vitest';
import { fitsPrimary, fitsTable } from '../../../src/handover/fits-table';
import { writeNpy } from '../../../src/handover/npy';
import { arrayPath, openBundle, readCells, replicaBlocks, type Bundle } from '../../../src/handover/open-bundle';
import { writeFits } from '../../../src/handover/write-fits';
import { Cancelled } from '../../../src/study/input-error';
import { makeBundle } from './make-bundle';
import { hasPython, python } from './python';

const noAstropy = !hasPython('numpy', 'astropy.io.fits');

let bundle: Bundle;
let out: string;
beforeAll(async () => {
  bundle = openBundle(await makeBundle({ replicas: 6 }));
  out = join(bundle.folder, 'gallery.rsp');
  await writeFits(bundle, { out, replicas: { from: 2, to: 5 } });
});
afterAll(() => rmSync(bundle.folder, { recursive: true }));
const place = (part: string): string => join(bundle.folder, `gallery-${part}.rsp`);

interface Extension {
  header: Record<string, unknown>;
  comments: string;
  columns: Record<string, [format: string, unit: string | null]>;
  rows: Record<string, unknown[]>;
}

/** Every extension of a file as astropy reads it, after `verify('exception')`; reals as exact doubles. */
function astropy(path: string): Extension[] {
  const script = `
import json, sys, warnings, numpy
from astropy.io import fits
warnings.simplefilter("error")
plain = lambda v: v.tolist() if isinstance(v, (numpy.ndarray, numpy.generic)) else v
with fits.open(sys.argv[1]) as hdus:
    hdus.verify("exception")
    out = [{
        "header": {k: v for k, v in h.header.items() if k not in ("COMMENT", "")},
        "comments": " ".join(h.header.get("COMMENT", [])),
        "columns": {c.name: [c.format, c.unit] for c in (h.columns if h.data is not None else [])},
        "rows": {n: [plain(v) for v in h.data[n]] for n in (h.columns.names if h.data is not None else [])},
    } for h in hdus]
print(json.dumps(out))`;
  return python(script, path) as Extension[];
}

/** A matrix unpacked by the conventions of the standard: groups of channels from `F_CHAN`, `TLMIN` being the first. */
function unpack({ header, rows }: Extension): number[][] {
  const first = header[`TLMIN${Object.keys(rows).indexOf('F_CHAN') + 1}`] as number;
  return (rows['MATRIX'] as number[][]).map((elements, j) => {
    const row = new Array<number>(header['DETCHANS'] as number).fill(0);
    const starts = rows['F_CHAN']![j] as number[];
    const lengths = rows['N_CHAN']![j] as number[];
    expect(rows['N_GRP']![j]).toBe(starts.length);
    let at = 0;
    starts.forEach((start, g) => {
      for (let k = 0; k < lengths[g]!; k++) row[start - first + k] = elements[at++]!;
    });
    expect(at).toBe(elements.length);
    return row;
  });
}

/** The window part of `[5 columns, 7 outcomes]`, rounded to 4 bytes: 3 rows of 4 channels. */
const window = (cells: Float64Array, by = (_: number): number => 1): number[][] =>
  [1, 2, 3].map((j) => [1, 2, 3, 4].map((k) => Math.fround(cells[j * 7 + k]! / by(j))));

const efficiency = (j: number): number =>
  readCells(bundle, 'posterior/mean')
    .subarray(j * 7, j * 7 + 6)
    .reduce((sum, p) => sum + p, 0);

describe.skipIf(noAstropy)('a response file, read by astropy,', () => {
  it('holds the mean matrix with every loss, row by row, zeros left out as the standard asks', () => {
    const [primary, matrix, bounds] = astropy(out) as [Extension, Extension, Extension];
    expect(primary.header['NAXIS']).toBe(0);
    expect(unpack(matrix)).toEqual(window(readCells(bundle, 'posterior/mean')));
    // Cell 1 of every column of the test bundle is empty, so each row begins at channel 2.
    expect(matrix.rows['F_CHAN']).toEqual([[2], [2], [2]]);
    expect(bounds.header['EXTNAME']).toBe('EBOUNDS');
    expect(matrix.comments).toContain('lost, below the first or above the last channel are missing');
  });

  it('has the keywords, columns and types of the matrix extension (CAL/GEN/92-002, 3.1; from memory)', () => {
    const [, { header, columns }] = astropy(out) as [Extension, Extension];
    expect(header).toMatchObject({
      EXTNAME: 'SPECRESP MATRIX',
      HDUCLASS: 'OGIP',
      HDUCLAS1: 'RESPONSE',
      HDUCLAS2: 'RSP_MATRIX',
      HDUCLAS3: 'FULL',
      HDUVERS: '1.3.0',
      TELESCOP: 'NONE',
      INSTRUME: 'Bench photons, "test"',
      FILTER: 'NONE',
      CHANTYPE: 'PI',
      DETCHANS: 4,
      TTYPE4: 'F_CHAN',
      TLMIN4: 1,
      TLMAX4: 4,
      NUMGRP: 3,
      NUMELT: 9,
      LO_THRES: 0,
    });
    expect(columns).toEqual({
      ENERG_LO: ['E', 'keV'],
      ENERG_HI: ['E', 'keV'],
      N_GRP: ['I', null],
      F_CHAN: ['PI(1)', null],
      N_CHAN: ['PI(1)', null],
      MATRIX: ['PE(3)', null],
    });
  });

  it('has true bins as rows and reconstructed bins as channels, in keV (3.1.2 and 3.2.2; from memory)', () => {
    const [, matrix, bounds] = astropy(out) as [Extension, Extension, Extension];
    const edges = (bundle.axes.true as { edges: Float64Array }).edges.map((e) => Math.fround(e * 1e3));
    expect(matrix.rows['ENERG_LO']).toEqual([...edges.subarray(0, 3)]);
    expect(matrix.rows['ENERG_HI']).toEqual([...edges.subarray(1)]);
    expect(bounds.rows).toEqual({ CHANNEL: [1, 2, 3, 4], E_MIN: [0, 200, 400, 900], E_MAX: [200, 400, 900, 1700] });
    expect(bounds.columns).toEqual({ CHANNEL: ['I', null], E_MIN: ['E', 'keV'], E_MAX: ['E', 'keV'] });
    const keywords = {
      HDUCLASS: 'OGIP',
      HDUCLAS1: 'RESPONSE',
      HDUCLAS2: 'EBOUNDS',
      HDUVERS: '1.2.0',
      DETCHANS: 4,
      TLMIN1: 1,
    };
    expect(bounds.header).toMatchObject(keywords);
  });

  it('is accompanied by redistribution and efficiency, whose product is the mean matrix', () => {
    const [, redistribution] = astropy(place('redistribution')) as [Extension, Extension];
    const [, response] = astropy(place('efficiency')) as [Extension, Extension];
    expect(redistribution.header).toMatchObject({ EXTNAME: 'MATRIX', HDUCLAS3: 'REDIST' });
    expect(unpack(redistribution)).toEqual(window(readCells(bundle, 'posterior/mean'), efficiency));
    expect(response.header).toMatchObject({ EXTNAME: 'SPECRESP', HDUCLAS2: 'SPECRESP', HDUVERS: '1.1.0' });
    expect(response.columns).toMatchObject({
      ENERG_LO: ['E', 'keV'],
      ENERG_HI: ['E', 'keV'],
      SPECRESP: ['E', 'cm**2'],
    });
    expect(response.rows['SPECRESP']).toEqual([1, 2, 3].map((j) => Math.fround(efficiency(j))));
  });

  it('holds each replica asked for in one extension, EXTVER its number counted from 1', () => {
    const [primary, bounds, ...replicas] = astropy(place('replicas')) as [Extension, Extension, ...Extension[]];
    expect(primary.comments).toContain('never their sum');
    expect(bounds.header['EXTNAME']).toBe('EBOUNDS');
    expect(replicas.map(({ header }) => header['EXTVER'])).toEqual([3, 4, 5]);
    const [block] = [...replicaBlocks(bundle, 2, 5)];
    replicas.forEach((replica, r) => {
      expect(replica.header['EXTNAME']).toBe('SPECRESP MATRIX');
      expect(unpack(replica)).toEqual(window(block!.values.subarray(r * 35, (r + 1) * 35)));
    });
  });

  it('says nothing of the efficiency where losses are not recorded', async () => {
    const blind = openBundle(await makeBundle({ lost: 'unrecorded', replicas: 0 }));
    const files = await writeFits(blind, { out: join(blind.folder, 'a.rmf') });
    expect(files).toHaveLength(1);
    const [, matrix] = astropy(files[0]!.path) as [Extension, Extension];
    expect(matrix.header).toMatchObject({ EXTNAME: 'MATRIX', HDUCLAS3: 'REDIST' });
    expect(matrix.comments).toContain('Losses were not recorded');
    rmSync(blind.folder, { recursive: true });
  });

  it('opens a new group of channels after every zero, and gives a row without elements no group', async () => {
    const gaps = openBundle(await makeBundle({ replicas: 0 }));
    const means = new Float64Array(35);
    means.set([0.25, 0, 0.125, 0.5], 8);
    means.set([0, 0.1, 1e-50, 0.2], 22);
    await writeNpy(arrayPath(gaps.folder, 'posterior/mean'), '<f8', [5, 7], means);
    await writeFits(gaps, { out: join(gaps.folder, 'a.rsp') });
    const [, matrix] = astropy(join(gaps.folder, 'a.rsp')) as [Extension, Extension];
    expect(matrix.rows).toMatchObject({ N_GRP: [2, 0, 2], F_CHAN: [[1, 3], [], [2, 4]], N_CHAN: [[1, 2], [], [1, 1]] });
    expect(unpack(matrix)).toEqual([
      [0.25, 0, 0.125, 0.5],
      [0, 0, 0, 0],
      [0, Math.fround(0.1), 0, Math.fround(0.2)],
    ]);
    expect(matrix.header).toMatchObject({ NUMGRP: 4, NUMELT: 5 });
    rmSync(gaps.folder, { recursive: true });
  });

  it('keeps rows of several groups and rows of none, of any length', () => {
    const path = join(bundle.folder, 'table.fits');
    const values = [[1, 2, 3], [], [4]];
    const columns = [
      { name: 'A', type: 'I' as const, values },
      { name: 'B', type: 'J' as const, values: [7, 8, -2147483648] },
      { name: 'C', type: 'D' as const, values: [[], [0.1], [1 / 3, 1e300]] },
    ];
    const text = `it's ${"'".repeat(70)}`;
    const cards: [string, string | number | boolean, string?][] = [
      ['NAME', text, 'µ'],
      ['SMALL', 1.5e-300],
      ['YES', true],
    ];
    const comments = ['word '.repeat(40), 'x'.repeat(200)];
    writeFileSync(
      path,
      Buffer.concat([fitsPrimary([], []), fitsTable({ name: 'T', version: 2, columns, cards, comments })]),
    );
    const [, table] = astropy(path) as [Extension, Extension];
    expect(table.rows).toEqual({ A: values, B: [7, 8, -2147483648], C: [[], [0.1], [1 / 3, 1e300]] });
    expect(table.header).toMatchObject({ SMALL: 1.5e-300, YES: true });
    expect(text.startsWith(table.header['NAME'] as string)).toBe(true);
    expect(table.comments.replaceAll(/\s/g, '')).toBe(comments.join('').replaceAll(' ', ''));
  });
});

describe('a response file', () => {
  it('is made of blocks of 2880 bytes and cards of printable ASCII', () => {
    const bytes = readFileSync(out);
    expect(bytes.length % 2880).toBe(0);
    expect(bytes.subarray(0, 2880).toString('latin1')).toMatch(/^SIMPLE {2}= {20}T[\x20-\x7e]+$/);
  });

  it('refuses axes that are no energies, and bins that 4 bytes cannot tell apart', async () => {
    const energy = { unit: 'keV', from: 1, to: 2, bins: 3 };
    const cases: [object, RegExp][] = [
      [{ tags: ['electron', 'pion'] }, /axes\.true: tags are no energies: OGIP/],
      [{ unit: 'cm', from: 0, to: 1, bins: 2 }, /axes\.true: the unit "cm" is none of energy: /],
      [{ unit: 'keV', edges: [1, 1 + 1e-9, 2] }, /axes\.true: bins too narrow/],
      [{ unit: 'TeV', edges: [1, 1e35] }, /axes\.true: bins too narrow or energies too large/],
    ];
    for (const [axis, message] of cases) {
      const axes = { true: axis, reconstructed: energy } as Parameters<typeof makeBundle>[0] extends { axes?: infer A }
        ? A
        : never;
      const refused = openBundle(await makeBundle({ axes }));
      await expect(writeFits(refused, { out: join(refused.folder, 'a.rmf') })).rejects.toThrow(message);
      rmSync(refused.folder, { recursive: true });
    }
  });

  it('leaves what stood there when it is cancelled, in all its files', async () => {
    const before = readdirSync(bundle.folder).sort();
    const bytes = readFileSync(out);
    const stop = new AbortController();
    const late = writeFits(bundle, { out, signal: stop.signal, onProgress: () => stop.abort() });
    await expect(late).rejects.toThrow(Cancelled);
    expect(readdirSync(bundle.folder).sort()).toEqual(before);
    expect(readFileSync(out).equals(bytes)).toBe(true);
  });
});
