import { readFileSync } from 'node:fs';
import { describe, expect, test } from 'vitest';
import { unlz4 } from '../../../src/events/lz4';
import { xxHash32 } from '../../../src/events/xxhash32';
import { InputError } from '../../../src/study/input-error';
import { made } from './reference-rows';

const MOST = 1 << 24;
/** The table that make.py compresses with the reference program. */
const TABLE = `t,r\n${Array.from({ length: 40_000 }, (_, i) => `${i % 50}.25,${(i * 7) % 101}\n`).join('')}`;
const frames = (name: string): Buffer => readFileSync(made(`${name}.lz4`));
const text = (bytes: Uint8Array): string => Buffer.from(bytes).toString('latin1');

function outcome(bytes: Uint8Array, most = MOST): string {
  try {
    return text(unlz4(bytes, 'events', most)) === TABLE ? 'the table' : 'something else';
  } catch (cause) {
    return cause instanceof InputError ? cause.message : `fault: ${(cause as Error).stack}`;
  }
}

describe('XXH32', () => {
  test('gives the known answers of its author for nothing, one and three bytes (xxHash, from memory)', () => {
    for (const [of, hash] of [
      ['', 0x02cc5d05],
      ['a', 0x550d7456],
      ['abc', 0x32d153ff],
    ] as const) {
      expect(xxHash32(Buffer.from(`--${of}--`), 2, 2 + of.length)).toBe(hash);
    }
  });
});

describe('LZ4 frames that the reference program made', () => {
  test('give what was compressed: linked and independent blocks, checked or not, several frames and skippable ones', () => {
    for (const name of ['checked', 'linked', 'unchecked', 'frames'])
      expect(outcome(frames(name)), name).toBe('the table');
  });

  test('may hold blocks stored as they are', () => {
    const content = unlz4(frames('stored'), 'events', MOST);
    // Random bytes of make.py as UTF-8, in which a byte above 127 takes two.
    expect(Buffer.from(content).toString('utf8').length).toBe(70_000);
  });

  test('stop wherever they break off, but between two frames', () => {
    const all = frames('checked');
    for (let length = 1; length < all.length; length = Math.ceil(length * 1.1) + 1) {
      expect(outcome(all.subarray(0, length)), `${length}`).toMatch(
        /^events: damaged LZ4 data at byte \d+ of a buffer \(/,
      );
    }
  });

  test('stop at any bit that is turned, where they are checked', () => {
    const all = frames('checked');
    for (let at = 0; at < all.length; at = Math.ceil(at * 1.07) + 1) {
      const bad = Buffer.from(all);
      bad[at] = bad[at]! ^ (1 << (at % 8));
      // A size that became smaller or larger is met as the damage that it makes further on.
      expect(outcome(bad), `${at}`).toMatch(/^events: (damaged LZ4 data at byte|LZ4 data that grow beyond)/);
    }
  });

  test('never read or write beyond their bounds, whatever bits are turned where nothing is checked', () => {
    const all = frames('unchecked');
    for (let at = 0; at < all.length; at += 37) {
      const bad = Buffer.from(all);
      bad[at] = bad[at]! ^ 0xff;
      expect(outcome(bad), `${at}`).not.toMatch(/^fault/);
    }
  });

  test('stop where they grow beyond what may be taken into memory', () => {
    expect(outcome(frames('checked'), 100_000)).toMatch(/LZ4 data that grow beyond 100000 bytes/);
  });
});
