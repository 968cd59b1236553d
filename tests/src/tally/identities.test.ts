import fc from 'fast-check';
import { mkdtempSync, rmSync } from 'node:fs';
import { tmpdir } from 'node:os';
import { join } from 'node:path';
import { afterEach, beforeEach, describe, expect, it } from 'vitest';
import { findDuplicates, IdentitySpill, sortedRecords, spilledBuckets } from '../../../src/tally/identities';

let folder: string;
beforeEach(() => void (folder = mkdtempSync(join(tmpdir(), 'identities-'))));
afterEach(() => rmSync(folder, { recursive: true }));

/** Spreads records over writers and finds duplicates. */
const duplicatesOf = (records: [high: number, low: number, unit: number, place: number][], writers: number) => {
  const names = Array.from({ length: writers }, (_, w) => String(w));
  const spills = names.map((name) => new IdentitySpill(folder, name));
  records.forEach((record, i) => spills[i % writers]!.addRecord(...record));
  for (const spill of spills) spill.finish();
  return findDuplicates(spilledBuckets(folder, names), (unit, place) => `${unit}:${place}`);
};

describe('duplicate identities', () => {
  it('are none among distinct keys, equal in one word or not', () => {
    const records = Array.from(
      { length: 3000 },
      (_, i) => [Math.imul(i, 0x9e3779b1) >>> 0, 7, 0, i] as [number, number, number, number],
    );
    expect(duplicatesOf(records, 2)).toEqual({ identities: 0, rows: 0, examples: [] });
  });

  it('are counted with the rows in excess, and shown by place in the order of the files, whoever saw them', () => {
    const records: [number, number, number, number][] = [
      [5, 5, 1, 10],
      [0xf0000000, 1, 0, 3],
      [5, 5, 0, 90],
      [6, 5, 0, 91],
      [0xf0000000, 1, 0, 2],
      [5, 5, 2, 1],
    ];
    const expected = {
      identities: 2,
      rows: 3,
      examples: [
        ['0:2', '0:3'],
        ['0:90', '1:10', '2:1'],
      ],
    };
    expect(duplicatesOf(records, 1)).toEqual(expected);
    rmSync(folder, { recursive: true });
    folder = mkdtempSync(join(tmpdir(), 'identities-'));
    expect(duplicatesOf([...records].reverse(), 3)).toEqual(expected);
  });

  it('are found when a buffer had to be written out in between', () => {
    const records = Array.from({ length: 10_000 }, (_, i) => [i % 9999, 1, 0, i] as [number, number, number, number]);
    expect(duplicatesOf(records, 2)).toEqual({ identities: 1, rows: 1, examples: [['0:0', '0:9999']] });
  });
});

describe('records of identities', () => {
  it('are sorted by key, then unit, then place, as numbers without sign', () => {
    const word = fc.oneof(fc.constantFrom(0, 1, 255, 256, 0x7fffffff, 0x80000000, 0xffffffff), fc.nat(3), fc.nat());
    fc.assert(
      fc.property(fc.array(fc.tuple(word, word, word, word), { maxLength: 60 }), (records) => {
        const expected = [...records].sort((a, b) => {
          const differing = a.findIndex((each, i) => each !== b[i]);
          return differing < 0 ? 0 : a[differing]! - b[differing]!;
        });
        expect([...sortedRecords(Uint32Array.from(records.flat()))]).toEqual(expected.flat());
      }),
      { numRuns: 500, seed: 5 },
    );
  });
});
