import { existsSync, readFileSync, statSync } from 'node:fs';
import { mkdtemp, rm, writeFile } from 'node:fs/promises';
import { createHash } from 'node:crypto';
import { basename, join, relative, resolve, sep } from 'node:path';
import { differenceOfHdf5 } from '../src/handover/check-hdf5';
import { formatOf, type FormatId } from '../src/handover/formats';
import { parseReplicaRange, resolveRange, type ReplicaRange } from '../src/handover/handover-options';
import {
  HANDOVER_SCHEMA,
  readHandoverRecord,
  recordedFiles,
  recordPlace,
  type HandoverRecord,
} from '../src/handover/handover-record';
import { openBundle, type Bundle } from '../src/handover/open-bundle';
import { weigh, writeWhole, type WrittenFile } from '../src/handover/whole-file';
import { MANIFEST } from '../src/handover/write-bundle';
import { InputError } from '../src/study/input-error';
import type { Progress } from './progress';
import type { Check, Verification } from './verify';

export interface Conversion {
  bundle: string;
  to: FormatId;
  out: string;
  /** All of them when absent. */
  replicas?: ReplicaRange | undefined;
  /** Whether files that stand in the way may be replaced. */
  replace?: boolean;
  signal?: AbortSignal | undefined;
  onProgress?: ((progress: Progress) => void) | undefined;
}

/**
 * Hands a bundle over in another format, beside a record of what was written (`OUT.handover.json`). Returns all files,
 * the record last. Throws `InputError` where the bundle is damaged, holds no such replicas, the place lies inside the
 * bundle, or something stands there and may not be replaced.
 */
export async function convertBundle(conversion: Conversion): Promise<WrittenFile[]> {
  const { to, out, signal, onProgress } = conversion;
  const bundle = openBundle(conversion.bundle);
  const format = formatOf(to);
  const replicas = rangeFor(conversion, bundle);
  checkPlace(conversion, `replicas${format.endings[0]}`);
  const files = await format.write(bundle, {
    out,
    replicas,
    signal,
    onProgress: (done, total) => onProgress?.({ stage: 'writing', done, total, unit: 'replicas' }),
  });
  const record = recordOf(bundle, to, replicas, files);
  const text = `${JSON.stringify(record, null, 1)}\n`;
  return [...files, ...(await writeWhole([recordPlace(out)], ([path]) => writeFile(path!, text)))];
}

/** Reads `--replicas A..B`, counted from 0, both ends included. */
export const replicasOption = (text: string): ReplicaRange => parseReplicaRange(text);

function rangeFor({ to, replicas }: Conversion, bundle: Bundle): ReplicaRange {
  if (replicas && !formatOf(to).replicas) {
    throw new InputError('--replicas', `${to} holds no replicas`, 'leave it out, or choose another format');
  }
  return formatOf(to).replicas ? resolveRange(replicas, bundle.replicas, bundle.folder) : { from: 0, to: 0 };
}

/**
 * Throws `InputError` for a place that lies inside the bundle, is a folder, or holds a file that may not be replaced.
 * `example` is a name that such a file might have.
 */
export function checkPlace(
  { bundle, out, replace }: Pick<Conversion, 'bundle' | 'out' | 'replace'>,
  example: string,
): void {
  const inside = relative(resolve(bundle), resolve(out));
  if (!inside.startsWith(`..${sep}`) && inside !== resolve(out)) {
    throw new InputError(out, 'lies inside the bundle', 'name a place outside: a bundle holds what its manifest names');
  }
  const facts = statSync(out, { throwIfNoEntry: false });
  if (facts?.isDirectory()) throw new InputError(out, 'is a folder', `name a file, for instance ${join(out, example)}`);
  if (facts && replace === false)
    throw new InputError(out, 'is there already', 'choose another name, or let it be replaced');
}

function recordOf(bundle: Bundle, to: FormatId, replicas: ReplicaRange, files: readonly WrittenFile[]): HandoverRecord {
  const { program, study } = bundle.manifest;
  return {
    schema: HANDOVER_SCHEMA,
    program,
    format: to,
    bundle: { manifest: manifestHash(bundle.folder), study: study.fingerprint },
    replicas,
    files: files.map(({ path, bytes, sha256 }) => ({ name: basename(path), bytes, sha256 })),
  };
}

function manifestHash(folder: string): string {
  return createHash('sha256')
    .update(readFileSync(join(folder, MANIFEST)))
    .digest('hex');
}

export interface HandoverCheckOptions {
  /** The bundle the file was made of: with it the content is compared, without it the hashes alone. */
  bundle?: string | undefined;
  signal?: AbortSignal | undefined;
  onProgress?: ((progress: Progress) => void) | undefined;
}

/**
 * Checks a handed-over file and those beside it against their record and, where the bundle is named, against what the
 * bundle holds. Throws `InputError` where there is no record.
 */
export async function verifyHandover(file: string, options: HandoverCheckOptions = {}): Promise<Verification> {
  const { record, folder } = readHandoverRecord(file);
  const checks = [await checkFiles(record, folder, options)];
  if (options.bundle !== undefined && checks[0]!.holds) {
    const bundle = openBundle(options.bundle);
    checks.push(checkOrigin(record, bundle));
    if (checks[1]!.holds) checks.push(await checkContent(record, folder, bundle, options));
  }
  return { holds: checks.every(({ holds }) => holds), checks };
}

async function checkFiles(
  record: HandoverRecord,
  folder: string,
  { signal, onProgress }: HandoverCheckOptions,
): Promise<Check> {
  const what = 'every file is as its record says';
  const files = recordedFiles(record, folder);
  for (const [i, { path, name, bytes, sha256 }] of files.entries()) {
    if (!existsSync(path)) return { what, holds: false, detail: `${name} is missing` };
    const found = await weigh(path, signal);
    if (found.bytes !== bytes)
      return { what, holds: false, detail: `${name} has ${found.bytes} bytes, the record says ${bytes}` };
    if (found.sha256 !== sha256) return { what, holds: false, detail: `${name} was changed: its SHA-256 differs` };
    onProgress?.({ stage: 'checking', done: i + 1, total: files.length, unit: 'steps' });
  }
  return { what, holds: true, detail: `${files.length} ${files.length === 1 ? 'file' : 'files'}, SHA-256` };
}

function checkOrigin(record: HandoverRecord, bundle: Bundle): Check {
  const found = manifestHash(bundle.folder);
  return {
    what: 'it was made of this bundle',
    holds: found === record.bundle.manifest,
    detail: `SHA-256 of ${MANIFEST}: ${found.slice(0, 12)}, recorded ${record.bundle.manifest.slice(0, 12)}`,
  };
}

/** Numbers against numbers: by reading HDF5, and by converting again what has reproducible bytes. */
async function checkContent(
  record: HandoverRecord,
  folder: string,
  bundle: Bundle,
  options: HandoverCheckOptions,
): Promise<Check> {
  const format = formatOf(record.format);
  if (!format.reproducible) {
    const differs = await differenceOfHdf5(recordedFiles(record, folder)[0]!.path, bundle, record.replicas);
    const what = 'every array is that of the bundle, to the bit';
    return {
      what,
      holds: differs === null,
      detail: differs === null ? 'read again and compared' : `${differs} differs`,
    };
  }
  const differs = await differenceOfBytes(record, folder, bundle, options);
  const what = 'the bundle gives these files, to the bit';
  return {
    what,
    holds: differs === null,
    detail: differs === null ? 'converted again and compared' : `${differs} differs`,
  };
}

async function differenceOfBytes(
  record: HandoverRecord,
  folder: string,
  bundle: Bundle,
  { signal, onProgress }: HandoverCheckOptions,
): Promise<string | null> {
  const scratch = await mkdtemp(join(folder, '.check-'));
  try {
    const again = await formatOf(record.format).write(bundle, {
      out: join(scratch, record.files[0]!.name),
      replicas: record.replicas,
      signal,
      onProgress: (done, total) => onProgress?.({ stage: 'checking', done, total, unit: 'replicas' }),
    });
    const differs = record.files.find(
      ({ name, sha256 }, i) => again[i]?.sha256 !== sha256 || basename(again[i].path) !== name,
    );
    return differs?.name ?? null;
  } finally {
    await rm(scratch, { recursive: true, force: true });
  }
}
