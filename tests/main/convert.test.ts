import {
  appendFileSync,
  cpSync,
  existsSync,
  mkdtempSync,
  readdirSync,
  readFileSync,
  rmSync,
  writeFileSync,
} from 'node:fs';
import { tmpdir } from 'node:os';
import { basename, join } from 'node:path';
import { afterAll, beforeAll, describe, expect, it } from 'vitest';
import { convertBundle, replicasOption, verifyHandover } from '../../main/convert';
import { FORMATS, formatOf } from '../../src/handover/formats';
import { writeNpy } from '../../src/handover/npy';
import { recordPlace } from '../../src/handover/handover-record';
import { Cancelled, InputError } from '../../src/study/input-error';
import { makeBundle } from '../src/handover/make-bundle';

let bundle: string;
let folder: string;
beforeAll(async () => {
  bundle = await makeBundle({ replicas: 9 });
  folder = mkdtempSync(join(tmpdir(), 'entasis-convert-'));
});
afterAll(() => [bundle, folder].forEach((path) => rmSync(path, { recursive: true })));

const place = (id: string): string => join(folder, `all-${id}${formatOf(id).endings[0]}`);

describe('a conversion', () => {
  it('to any format of the table is written with a record, and verified against record and bundle', async () => {
    for (const { id } of FORMATS) {
      const files = await convertBundle({ bundle, to: id, out: place(id) });
      expect(
        files.every(({ path }) => existsSync(path)),
        id,
      ).toBe(true);
      expect(files[0]!.path).toBe(place(id));
      expect(files.at(-1)!.path).toBe(recordPlace(place(id)));
      const { holds, checks } = await verifyHandover(place(id), { bundle });
      expect([holds, checks.length], id).toEqual([true, 3]);
    }
  });

  it('tells its progress in replicas, to the last', async () => {
    const told: number[] = [];
    const onProgress = ({ done }: { done: number }): void => void told.push(done);
    await convertBundle({ bundle, to: 'npz', out: place('npz'), replicas: { from: 1, to: 9 }, onProgress });
    expect(told.at(-1)).toBe(8);
  });

  it('refuses a place inside the bundle, a folder, and replicas of a format that has none', async () => {
    const inside = convertBundle({ bundle, to: 'npz', out: join(bundle, 'tally', 'a.npz') });
    await expect(inside).rejects.toThrow(/lies inside the bundle/);
    await expect(convertBundle({ bundle, to: 'npz', out: folder })).rejects.toThrow(/is a folder: name a file/);
    const json = convertBundle({ bundle, to: 'json', out: place('json'), replicas: { from: 0, to: 1 } });
    await expect(json).rejects.toThrow(/json holds no replicas/);
    const beyond = convertBundle({ bundle, to: 'csv', out: place('csv'), replicas: { from: 0, to: 10 } });
    await expect(beyond).rejects.toThrow(/it holds 0 to 8/);
  });

  it('replaces a file only where it may', async () => {
    const out = join(folder, 'mine.csv');
    writeFileSync(out, 'mine');
    await expect(convertBundle({ bundle, to: 'csv', out, replace: false })).rejects.toThrow(/is there already/);
    expect(readFileSync(out, 'utf8')).toBe('mine');
    await convertBundle({ bundle, to: 'csv', out, replace: true });
    expect(readFileSync(out, 'utf8')).not.toBe('mine');
  });

  it('that is cancelled writes no record', async () => {
    const out = join(folder, 'never.npz');
    await expect(convertBundle({ bundle, to: 'npz', out, signal: AbortSignal.abort() })).rejects.toThrow(Cancelled);
    expect(readdirSync(folder).filter((name) => name.includes('never'))).toEqual([]);
  });
});

describe('the range of --replicas', () => {
  it('counts from 0 and includes both ends', () => {
    expect(replicasOption('0..99')).toEqual({ from: 0, to: 100 });
    expect(replicasOption('7')).toEqual({ from: 7, to: 8 });
    for (const text of ['', '3..2', '-1..2', '1-2', '1..', '1e3..2e3', '0..99999999999999999999']) {
      expect(() => replicasOption(text), text).toThrow(InputError);
    }
  });
});

describe('verifying a handed-over file', () => {
  it('finds one byte changed, added or taken away, and a file that is gone', async () => {
    const out = join(folder, 'v.csv');
    await convertBundle({ bundle, to: 'csv', out });
    const summary = join(folder, 'v-summary.csv');
    const text = readFileSync(summary, 'utf8');
    writeFileSync(summary, text.replace('0', '1'));
    expect((await verifyHandover(out)).checks[0]).toMatchObject({
      holds: false,
      detail: expect.stringMatching(/^v-summary\.csv was changed/),
    });
    appendFileSync(summary, ' ');
    expect((await verifyHandover(out)).checks[0]!.detail).toMatch(/bytes, the record says/);
    rmSync(summary);
    expect((await verifyHandover(out)).checks[0]!.detail).toBe('v-summary.csv is missing');
  });

  it('finds that it was made of another bundle', async () => {
    const other = await makeBundle({ replicas: 8 });
    await convertBundle({ bundle, to: 'npz', out: place('npz') });
    const { holds, checks } = await verifyHandover(place('npz'), { bundle: other });
    expect([holds, checks[0]!.holds, checks[1]!.holds]).toEqual([false, true, false]);
    rmSync(other, { recursive: true });
  });

  it("finds numbers that are not the bundle's, even where record and hashes agree with each other", async () => {
    for (const id of ['npz', 'hdf5', 'json'] as const) {
      const forged = join(folder, `forged-${id}`);
      cpSync(bundle, forged, { recursive: true });
      const shape = new Float64Array(35).fill(0.5);
      await writeNpy(join(forged, 'posterior', 'shape.npy'), '<f8', [5, 7], shape);
      const out = join(folder, `forged${formatOf(id).endings[0]}`);
      await convertBundle({ bundle: forged, to: id, out });
      expect((await verifyHandover(out)).holds).toBe(true);
      const { checks } = await verifyHandover(out, { bundle });
      expect(
        checks.map(({ holds }) => holds),
        id,
      ).toEqual([true, true, false]);
      expect(checks[2]!.detail).toMatch(id === 'hdf5' ? /^posterior\/shape differs$/ : /differs$/);
    }
  });

  it('leaves no scratch behind', () => {
    expect(readdirSync(folder).filter((name) => name.startsWith('.'))).toEqual([]);
  });

  it('ends in one line where the record is absent, damaged, or names files elsewhere', async () => {
    const out = join(folder, 'r.csv');
    await expect(verifyHandover(out)).rejects.toThrow(/no record r\.csv\.handover\.json beside it/);
    await convertBundle({ bundle, to: 'csv', out });
    const record = readFileSync(recordPlace(out), 'utf8');
    for (const name of ['../secret', '/etc/passwd', '..', 'a\\\\b']) {
      writeFileSync(recordPlace(out), record.replace(`"${basename(out)}"`, `"${name}"`));
      await expect(verifyHandover(out), name).rejects.toThrow(/r\.csv\.handover\.json: files\.0\.name/);
    }
    writeFileSync(recordPlace(out), record.slice(0, 50));
    await expect(verifyHandover(out)).rejects.toThrow(InputError);
  });
});
