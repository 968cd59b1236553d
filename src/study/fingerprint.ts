import { createHash } from 'node:crypto';
import type { Study } from './study';

/** SHA-256 of the resolved study, its keys sorted: two studies with the same fingerprint ask for the same build. */
export function studyFingerprint(study: Study): string {
  return createHash('sha256').update(canonicalJson(study)).digest('hex');
}

/** JSON with the keys of every object sorted and no white space. */
export function canonicalJson(value: unknown): string {
  if (Array.isArray(value)) return `[${value.map(canonicalJson).join(',')}]`;
  if (typeof value === 'object' && value !== null) {
    const entries = Object.entries(value).filter(([, v]) => v !== undefined);
    entries.sort(([a], [b]) => (a < b ? -1 : 1));
    return `{${entries.map(([k, v]) => `${JSON.stringify(k)}:${canonicalJson(v)}`).join(',')}}`;
  }
  return JSON.stringify(value);
}
