import { readFileSync, statSync } from 'node:fs';
import { basename, dirname, join } from 'node:path';
import { z } from '../study/zod';
import { InputError } from '../study/input-error';
import { parseJson } from '../study/study';
import { FORMAT_IDS } from './formats';

/** What stands beside handed-over files: what they are, of which bundle, and their hashes. Schema `entasis.handover/1`. */
export const HANDOVER_SCHEMA = 'entasis.handover/1';

const count = z.int().min(0);
const sha256 = z.string().regex(/^[0-9a-f]{64}$/);
/** A name without any folder: a record speaks of the files beside it and of no others. */
const plainName = z
  .string()
  .regex(/^[^/\\\0]+$/)
  .refine((name) => name !== '.' && name !== '..', 'needs a plain file name');

const record = z.strictObject({
  schema: z.literal(HANDOVER_SCHEMA),
  program: z.strictObject({ name: z.string(), version: z.string() }),
  format: z.enum(FORMAT_IDS),
  bundle: z.strictObject({ manifest: sha256, study: sha256 }),
  replicas: z.strictObject({ from: count, to: count }),
  files: z.array(z.strictObject({ name: plainName, bytes: count, sha256 })).min(1),
});
export type HandoverRecord = z.output<typeof record>;

/** Where the record of a handed-over file stands: the name of the file asked for, and an ending of its own. */
export function recordPlace(out: string): string {
  return `${out}.handover.json`;
}

/** Longest record that is read; one has a handful of files. */
const MOST_BYTES = 2 ** 20;

/**
 * Reads the record of a handed-over file, named by the file or by the record itself. Throws `InputError` where there is
 * none, or where it is damaged.
 */
export function readHandoverRecord(path: string): { record: HandoverRecord; folder: string } {
  const place = path.endsWith('.handover.json') ? path : recordPlace(path);
  const facts = statSync(place, { throwIfNoEntry: false });
  if (!facts?.isFile() || facts.size > MOST_BYTES) {
    throw new InputError(path, `no record ${basename(place)} beside it`, 'keep it with the files that convert wrote');
  }
  const result = record.safeParse(parseJson(readFileSync(place, 'utf8'), place));
  if (!result.success) {
    const issue = result.error.issues[0]!;
    const where = `${place}: ${issue.path.join('.') || '$'}`;
    throw new InputError(where, issue.message, 'the record is damaged: convert again');
  }
  return { record: result.data, folder: dirname(place) };
}

/** The files a record names, with where they stand. */
export function recordedFiles(
  record: HandoverRecord,
  folder: string,
): (HandoverRecord['files'][number] & { path: string })[] {
  return record.files.map((file) => ({ ...file, path: join(folder, file.name) }));
}
