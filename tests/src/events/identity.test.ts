import fc from 'fast-check';
import { describe, expect, test } from 'vitest';
import { identify, identifyNumber, identifyText } from '../../../src/events/identity';
import { murmur128 } from '../../../src/events/murmur';

const high = new Uint32Array(1);
const low = new Uint32Array(1);
const key = (): string => `${high[0]}:${low[0]}`;

function ofText(text: string): string {
  identifyText(text, high, low, 0);
  return key();
}

function ofNumber(value: number): string {
  identifyNumber(value, high, low, 0);
  return key();
}

describe('MurmurHash3_x86_128', () => {
  test('passes the verification of its author: the hash of the hashes of 256 keys begins with B3ECE62A', () => {
    // SMHasher, KeysetTest.cpp, VerificationTest (constant from memory): keys 0, 01, 012, ... with seed 256 - length.
    const keyBytes = Uint8Array.from({ length: 256 }, (_, i) => i);
    const hashes = new Uint32Array(256 * 4);
    for (let i = 0; i < 256; i++) murmur128(keyBytes, 0, i, 256 - i, hashes.subarray(4 * i, 4 * i + 4));
    const final = new Uint32Array(4);
    murmur128(new Uint8Array(hashes.buffer), 0, hashes.byteLength, 0, final);
    expect(final[0].toString(16)).toBe('b3ece62a');
  });
});

describe('the identity of an event', () => {
  test('is the same for a number and for its decimal text, whatever zeros are written', () => {
    fc.assert(
      fc.property(fc.integer({ min: -999_999_999_999_999, max: 999_999_999_999_999 }), (n) => {
        expect(ofText(String(n))).toBe(ofNumber(n));
        expect(ofText(`${n}.000`)).toBe(ofNumber(n));
        if (n >= 0) expect(ofText(`+00${n}`)).toBe(ofNumber(n));
      }),
      { seed: 5 },
    );
    expect(ofText(' 42 ')).toBe(ofNumber(42));
    expect(ofText('-0')).toBe(ofNumber(0));
    expect(ofText('0')).toBe(ofNumber(-0));
  });

  test('holds up to 15 digits as they are, and hashes what is longer', () => {
    expect(ofText('999999999999999')).toBe(ofNumber(999_999_999_999_999));
    expect(Number(ofText('999999999999999').split(':')[0]) >= 0x80000000).toBe(true);
    expect(Number(ofText('1000000000000000').split(':')[0]) < 0x80000000).toBe(true);
    expect(ofText('1000000000000000')).toBe(ofNumber(1e15));
    expect(ofText('1.5')).toBe(ofNumber(1.5));
  });

  test('differs where integers or texts differ, and no text has the key of an integer', () => {
    const seen = new Set<string>();
    for (let i = 0; i < 20_000; i++) {
      seen.add(ofText(`event-${i}`));
      seen.add(ofNumber(i));
      if (i > 0) seen.add(ofNumber(-i));
    }
    seen.add(ofText('1_0')).add(ofText('.')).add(ofText('-')).add(ofText('1.0.0')).add(ofText('0x1'));
    expect(seen.size).toBe(20_000 * 3 - 1 + 5);
  });

  test('is 0, 0 for a missing value alone', () => {
    for (const text of ['', 'NULL', 'nan', ' ']) expect(ofText(text)).toBe('0:0');
    expect(ofNumber(NaN)).toBe('0:0');
    expect(ofText('0')).not.toBe('0:0');
  });

  test('looks at the bytes of the field alone', () => {
    const bytes = Buffer.from('1234.5');
    identify(bytes, 1, 4, high, low, 0);
    expect(key()).toBe(ofNumber(234));
    identify(bytes, 1, 5, high, low, 0);
    expect(key()).toBe(ofNumber(234));
  });
});
