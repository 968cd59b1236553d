import { dirname, resolve } from 'node:path';
import { formatCount } from '../../src/audit/wording';
import { CAUTIONS } from '../../src/handover/cautions';
import { defaultBundleFolder, expandFiles } from '../../src/study/paths';
import { InputError } from '../../src/study/input-error';
import type { Study } from '../../src/study/study';
import { tallyPlan } from '../../src/tally/plan';
import { buildBundle, tableReader, type BuiltBundle, type BundleSource } from '../build';
import type { Surroundings } from '../surroundings';
import { combineParts } from '../parts';
import { sizedEnsemble } from '../ensemble-size';
import { ProgressLine } from '../progress-line';
import { readEvents } from '../read-events';
import { readStudyFile } from '../study-file';
import { windowFilesBeside } from '../window-files';
import { flagLines, ledgerText } from './wording';

export interface BuildFlags {
  out?: string;
  from?: string[];
  digits?: number;
  workers: number;
  json?: boolean;
}

/** `entasis build STUDY`: event files, or parts, to a bundle. */
export async function build(path: string, flags: BuildFlags, around: Surroundings): Promise<void> {
  const started = performance.now();
  const study = readStudyFile(path);
  const line = new ProgressLine();
  const onProgress = line.show.bind(line);
  const source = flags.from
    ? await fromParts(flags.from, study, path)
    : await readEvents({
        study,
        folder: dirname(resolve(path)),
        where: path,
        ...around,
        workers: flags.workers,
        onProgress,
      });
  try {
    const out = flags.out ?? defaultBundleFolder(path);
    const sized = flags.digits === undefined ? null : await withDigits(flags.digits, study, path, source, around, line);
    const built = await buildBundle({
      study: sized?.study ?? study,
      where: path,
      folder: dirname(resolve(path)),
      source,
      out,
      ...around,
      workers: flags.workers,
      onProgress,
    });
    line.clear();
    const seconds = (performance.now() - started) / 1000;
    const note = sized?.note ?? null;
    process.stdout.write(
      flags.json ? `${JSON.stringify(buildJson(built, seconds, note))}\n` : buildText(built, seconds, note),
    );
  } finally {
    await source.close();
  }
}

function withDigits(
  digits: number,
  study: Study,
  path: string,
  { tally }: BundleSource,
  { readWorker, signal }: Surroundings,
  line: ProgressLine,
): Promise<{ study: Study; note: string }> {
  const { file } = study.reference;
  const referenceTable = file === undefined ? null : tableReader(dirname(resolve(path)))(file);
  const matrixWorker = windowFilesBeside(readWorker).workerFiles.matrix;
  const onProgress = line.show.bind(line);
  return sizedEnsemble({ study, tally, referenceTable, digits, matrixWorker, signal, onProgress });
}

type ClosingSource = BundleSource & { close(): void | Promise<void> };

async function fromParts(paths: string[], study: Study, where: string): Promise<ClosingSource> {
  const parts = await combineParts(paths, tallyPlan(study));
  checkNoFileLeftOut(study, where, new Set(parts.inputs.map(({ name }) => name)));
  return parts;
}

/** A part that was lost must not go unnoticed: every file that the study names here is in some part. */
function checkNoFileLeftOut(study: Study, where: string, tallied: Set<string>): void {
  let files;
  try {
    files = expandFiles(study.events.files, dirname(resolve(where)), where);
  } catch {
    // The events need not be where the parts are joined.
    return;
  }
  const missing = files.find(({ name }) => !tallied.has(name));
  if (missing) {
    throw new InputError(
      `${where}: events.files`,
      `${missing.name} is in no part`,
      'tally it and name its part too, or narrow events.files',
    );
  }
}

function buildJson({ out, manifest, contents }: BuiltBundle, seconds: number, note: string | null): unknown {
  const { ledger, columns, outcomes, flags, study, seed, replicas, files, title } = manifest;
  const raised = contents.audit.flags.filter(({ state }) => state !== 'clear');
  return {
    bundle: out,
    title,
    fingerprint: study.fingerprint,
    ledger,
    columns,
    outcomes,
    flags,
    raised,
    seed,
    replicas,
    ...(note !== null && { digits: note }),
    files,
    seconds,
  };
}

function buildText({ out, manifest, contents }: BuiltBundle, seconds: number, note: string | null): string {
  const { ledger, columns, outcomes, replicas, seed, inputs, title, flags } = manifest;
  const lines = [
    title,
    ...ledgerText(ledger, inputs.length),
    `matrix: ${columns.length} columns x ${outcomes.length} outcomes; ${formatCount(replicas)} replicas, seed ${seed}`,
    ...(note === null ? [] : [`digits: ${note}`]),
    `audit: ${flags.flagged} flagged, ${flags.undecided} undecided`,
    ...flagLines(contents.audit.flags),
    `bundle: ${out} (${seconds.toFixed(1)} s)`,
    '',
    ...CAUTIONS,
  ];
  return `${lines.join('\n')}\n`;
}
