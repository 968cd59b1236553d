import { join } from 'node:path';

/** A file of tests/reference/events, made there by make.py. */
export const made = (name: string): string => join(import.meta.dirname, '../../reference/events', name);

/** Rows of the binary tables that make.py writes. */
export const ROWS = 1000;

/** The numbers of row `i` of these tables. */
export function referenceRow(i: number): Record<string, number> {
  return {
    e_tag: i / 4,
    e_cluster: i % 10 === 3 ? NaN : i / 8,
    big: i / 16,
    short: (i % 100) - 50,
    swapped: i - 500,
    event: Number(9007199254740992n + BigInt(i)),
    unsigned: Number(2n ** 63n + BigInt(i)),
    quality: i % 3 === 0 ? 1 : 0,
  };
}
