import { readFileSync } from 'node:fs';
import { describe, expect, test } from 'vitest';
import { csv } from '../../../src/events/csv';
import { fileOf, needsOf, readAll, type Gathered } from './gather';
import { made } from './reference-rows';

const needs = needsOf('t', 'r');

function expectTable({ rows, rejects, placesPassed }: Gathered, count: number): void {
  expect(rejects).toEqual([]);
  expect(placesPassed).toBe(count + 1);
  expect(rows.length).toBe(count);
  expect(rows.every(([place, t, r], i) => place === i + 2 && t === (i % 50) + 0.25 && r === (i * 7) % 101)).toBe(true);
}

async function refusal(bytes: Uint8Array): Promise<string> {
  return readAll(csv, fileOf(bytes, '.csv.zst'), needs).then(
    () => 'read without complaint',
    (cause: Error) => cause.message,
  );
}

describe('a zstd file', () => {
  test('with and without checksum gives every row, and its bytes as progress', async () => {
    for (const name of ['checked.csv.zst', 'unchecked.csv.zst']) {
      const all = await readAll(csv, made(name), needs, 4);
      expectTable(all, 40_000);
      expect(all.bytes).toBe(readFileSync(made(name)).length);
    }
  });

  test('may have several frames, empty and skippable ones among them', async () => {
    expectTable(await readAll(csv, made('frames.csv.zst'), needs), 40_000);
  });

  test('may be smaller than any block', async () => {
    expect((await readAll(csv, made('tiny.csv.zst'), needs)).rows).toEqual([[2, 1, 2]]);
  });

  test('that breaks off stops with the place, wherever it does', async () => {
    const bytes = readFileSync(made('frames.csv.zst'));
    for (let length = 5; length < bytes.length; length += 131) {
      const message = await refusal(bytes.subarray(0, length));
      // A cut between two frames leaves a whole file that is shorter: nothing in it can tell.
      if (message !== 'read without complaint') expect(message).toMatch(/truncated: .* at byte \d+|an empty file/);
    }
    const single = readFileSync(made('checked.csv.zst'));
    for (const length of [single.length - 1, single.length - 5, 200, 5]) {
      expect(await refusal(single.subarray(0, length))).toBe(
        `events: truncated: the zstd data break off at byte ${length}: copy or make the file again`,
      );
    }
  });

  test('with a checksum stops at any turned bit, with a place; or its text is no table before the checksum is reached', async () => {
    const bytes = readFileSync(made('checked.csv.zst'));
    const messages: string[] = [];
    // Byte 5 is the window, of which nothing but memory depends.
    for (let at = 6; at < bytes.length; at += 61) {
      const bad = Uint8Array.from(bytes);
      bad[at] ^= 1 << (at % 8);
      messages.push(await refusal(bad));
    }
    expect(messages).not.toContain('read without complaint');
    const placed = messages.filter((message) => /^events: (damaged|truncated).* at byte \d+/.test(message));
    expect(placed.length).toBeGreaterThan(messages.length / 2);
  });

  test('followed by anything else stops with the place', async () => {
    const bytes = readFileSync(made('tiny.csv.zst'));
    expect(await refusal(Buffer.concat([bytes, Buffer.from('more bytes')]))).toBe(
      `events: damaged zstd data at byte ${bytes.length} (no zstd frame begins here): copy or make the file again`,
    );
  });

  test('that asks for a window of more than 128 MiB is refused before memory is taken', async () => {
    const bytes = readFileSync(made('checked.csv.zst'));
    expect(bytes[4] & 32).toBe(0);
    const wide = Uint8Array.from(bytes);
    wide[5] = 18 << 3;
    expect(await refusal(wide)).toMatch(/zstd window over 128 MiB/);
    wide[5] = 17 << 3;
    expect(await refusal(wide)).toBe('read without complaint');
  });

  test('that needs a dictionary is refused', async () => {
    const header = [0x28, 0xb5, 0x2f, 0xfd, 0x01, 0x58, 0x07, 1, 0, 0];
    expect(await refusal(Uint8Array.from([...header, ...new Array(20).fill(0)]))).toMatch(/needs a dictionary/);
  });
});
