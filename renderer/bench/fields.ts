import type { ColumnSketch, FileInspection, Refusal } from '../../main/bridge';
import type { Study } from '../../src/study/study';

/** A column of the event files ("field", to keep it apart from the columns of the matrix), over all files looked into. */
export interface Field {
  name: string;
  type: 'number' | 'text';
  missing: number;
  nonFinite: number;
  rows: number;
  least: number | null;
  greatest: number | null;
  labels: string[] | null;
  /** How many of the files have it. */
  files: number;
  /** Of the file looked at. */
  sketch: ColumnSketch | null;
}

export type Role = keyof Study['roles'];
export const ROLES: readonly { role: Role; title: string; short: string; does: string }[] = [
  { role: 'true', title: 'True value', short: 'True value', does: 'known by the tag or the simulation' },
  { role: 'reconstructed', title: 'Reconstructed value', short: 'Reconstructed', does: 'what the instrument says' },
  { role: 'weight', title: 'Weight', short: 'Weight', does: 'of each event in every sum' },
  { role: 'run', title: 'Run', short: 'Run', does: 'label to look for drift by' },
  { role: 'event', title: 'Event identity', short: 'Event identity', does: 'to find duplicates by' },
];

/** The fields of the files, in the order of `shown`, then those only others have. */
export function mergeFields(inspections: readonly FileInspection[], shown: FileInspection | null): Field[] {
  const fields = new Map<string, Field>();
  const order = shown ? [shown, ...inspections.filter((one) => one !== shown)] : inspections;
  for (const inspection of order) {
    inspection.facts.columns.forEach((facts, i) => {
      const sketch = inspection === order[0] ? (inspection.sketches[i] ?? null) : null;
      const known = fields.get(facts.name);
      const rows = inspection.facts.rows;
      if (known) add(known, facts, rows);
      else fields.set(facts.name, { ...facts, rows, files: 1, sketch });
    });
  }
  return [...fields.values()];
}

function add(field: Field, facts: FileInspection['facts']['columns'][number], rows: number): void {
  field.files += 1;
  field.rows += rows;
  field.missing += facts.missing;
  field.nonFinite += facts.nonFinite;
  field.least = extreme(Math.min, field.least, facts.least);
  field.greatest = extreme(Math.max, field.greatest, facts.greatest);
  if (facts.type === 'text') field.type = 'text';
  if (field.labels && facts.labels) field.labels = [...new Set([...field.labels, ...facts.labels])];
  else field.labels = null;
}

function extreme(of: (a: number, b: number) => number, a: number | null, b: number | null): number | null {
  if (a === null || b === null) return a ?? b;
  return of(a, b);
}

export function isInspection(one: FileInspection | Refusal | undefined): one is FileInspection {
  return one !== undefined && 'facts' in one;
}

/** The role a field has in a study, `null` for none. */
export function roleOf(roles: Study['roles'], name: string): Role | null {
  return (Object.keys(roles) as Role[]).find((role) => roles[role] === name) ?? null;
}

/** The roles after a field was given one (or none): a role has one field, a field one role. */
export function withRole(roles: Study['roles'], name: string, role: Role | null): Study['roles'] {
  const next: Study['roles'] = { ...roles };
  for (const other of Object.keys(next) as Role[]) if (next[other] === name) clearRole(next, other);
  if (role) next[role] = name;
  return next;
}

function clearRole(roles: Study['roles'], role: Role): void {
  if (role === 'true' || role === 'reconstructed') roles[role] = '';
  else delete roles[role];
}
