import { readFileSync } from 'node:fs';

/** Check values made elsewhere: `tests/reference/<name>/values.json`, beside the script that made them. */
export function reference<T>(name: string): T {
  return JSON.parse(readFileSync(new URL(`../../reference/${name}/values.json`, import.meta.url), 'utf8')) as T;
}

/** What a failed comparison prints: input, found, expected, relative difference, tolerance. `null` where it holds. */
export function relativeMiss(input: unknown, found: number, expected: number, tolerance: number): string | null {
  const difference = found === expected ? 0 : Math.abs(found / expected - 1);
  if (difference <= tolerance) return null;
  return `${JSON.stringify(input)}: ${found} instead of ${expected}, off by ${difference.toExponential(2)} > ${tolerance}`;
}
