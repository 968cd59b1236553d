import { closeSync, existsSync, readFileSync, readdirSync, statSync } from 'node:fs';
import { join, relative, sep } from 'node:path';
import { parseManifest, type Manifest } from '../src/handover/manifest';
import { readNpy, readNpyHeader, openForReading } from '../src/handover/npy';
import { MANIFEST, REPLICAS } from '../src/handover/write-bundle';
import { posteriorOf } from '../src/posterior/posterior';
import { priorOf } from '../src/posterior/prior';
import { summarise } from '../src/posterior/summary';
import { studyFingerprint } from '../src/study/fingerprint';
import { InputError } from '../src/study/input-error';
import { parseStudyText, resolveAxis, type Study } from '../src/study/study';
import { ledgerBalances } from '../src/tally/ledger';
import type { Cells } from '../src/tally/tally';
import { checkEnsemble } from './draw-ensemble';
import type { Progress } from './progress';
import { hashFile } from './workers/hash-file';

/** One thing that was checked, and what was found. */
export interface Check {
  what: string;
  holds: boolean;
  detail: string;
}

export interface Verification {
  holds: boolean;
  checks: Check[];
}

export interface VerifyOptions {
  drawWorker: URL;
  workers: number;
  signal?: AbortSignal | undefined;
  onProgress?: (progress: Progress) => void;
}

/**
 * Checks a bundle: the hash of every file, the laws of ledger and tally, posterior and summary computed again from
 * the tally, and every replica drawn again from seed and tally, to the bit. Throws `InputError` where there is no
 * bundle to check; what does not hold is in the answer.
 */
export async function verifyBundle(bundle: string, options: VerifyOptions): Promise<Verification> {
  const place = join(bundle, MANIFEST);
  if (!existsSync(place)) throw new InputError(bundle, `no ${MANIFEST}`, 'name the folder of a bundle');
  const manifest = parseManifest(readFileSync(place, 'utf8'), place);
  const checks = [await checkHashes(bundle, manifest), checkLedger(manifest)];
  const readable = checkArrays(bundle, manifest);
  checks.push(readable);
  if (readable.holds) {
    const study = readStudy(bundle);
    checks.push(checkStudy(study, manifest), ...checkTally(bundle, manifest));
    checks.push(...(await checkAgain(bundle, manifest, study, options)));
  }
  return { holds: checks.every(({ holds }) => holds), checks };
}

async function checkHashes(bundle: string, manifest: Manifest): Promise<Check> {
  const what = 'every file is as the manifest says';
  for (const [name, { bytes, sha256 }] of Object.entries(manifest.files)) {
    const path = join(bundle, name);
    if (!existsSync(path)) return { what, holds: false, detail: `${name} is missing` };
    if (statSync(path).size !== bytes) {
      return { what, holds: false, detail: `${name} has ${statSync(path).size} bytes, the manifest says ${bytes}` };
    }
    if ((await hashFile(path)) !== sha256)
      return { what, holds: false, detail: `${name} was changed: its SHA-256 differs` };
  }
  const surplus = filesIn(bundle).filter((name) => name !== MANIFEST && !(name in manifest.files));
  if (surplus.length > 0) return { what, holds: false, detail: `${surplus[0]} is not in the manifest` };
  return { what, holds: true, detail: `${Object.keys(manifest.files).length} files, SHA-256` };
}

function filesIn(folder: string): string[] {
  const entries = readdirSync(folder, { recursive: true, withFileTypes: true });
  const files = entries.filter((entry) => entry.isFile());
  return files.map((entry) => relative(folder, join(entry.parentPath, entry.name)).split(sep).join('/')).sort();
}

function checkLedger({ ledger }: Manifest): Check {
  const { read, cut, rejected, unmatched, tallied } = ledger;
  return {
    what: 'the ledger balances',
    holds: ledgerBalances(ledger),
    detail: `read ${read} = cut ${cut} + rejected ${rejected} + unmatched ${unmatched} + tallied ${tallied}`,
  };
}

/** Arrays every bundle has, and their shapes must be those of its columns and outcomes. */
const CELL_ARRAYS = [
  'tally/counts.npy',
  'posterior/shape.npy',
  'posterior/mean.npy',
  'posterior/sd.npy',
  'posterior/lower.npy',
  'posterior/upper.npy',
];

function checkArrays(bundle: string, manifest: Manifest): Check {
  const what = 'every array has the layout the manifest says';
  const cells = [manifest.columns.length, manifest.outcomes.length];
  const wanted = new Map(CELL_ARRAYS.map((name) => [name, cells]));
  wanted.set(REPLICAS, [manifest.replicas, ...cells]);
  for (const [name, shape] of wanted) {
    if (!sameShape(manifest.arrays[name]?.shape ?? [], shape)) {
      return { what, holds: false, detail: `${name} is not [${shape.join(', ')}] in the manifest` };
    }
  }
  try {
    for (const [name, { type, shape }] of Object.entries(manifest.arrays)) {
      const path = join(bundle, name);
      const file = openForReading(path, name);
      const header = readNpyHeader(file, name);
      closeSync(file);
      if (header.type !== type || !sameShape(header.shape, shape)) {
        return { what, holds: false, detail: `${name} is ${header.type} [${header.shape.join(', ')}]` };
      }
    }
  } catch (error) {
    if (error instanceof InputError) return { what, holds: false, detail: error.message };
    throw error;
  }
  return { what, holds: true, detail: `${Object.keys(manifest.arrays).length} arrays` };
}

function sameShape(a: readonly number[], b: readonly number[]): boolean {
  return a.length === b.length && a.every((n, i) => n === b[i]);
}

function readStudy(bundle: string): Study {
  const path = join(bundle, 'study.json');
  return parseStudyText(readFileSync(path, 'utf8'), path);
}

function checkStudy(study: Study, manifest: Manifest): Check {
  const holds =
    studyFingerprint(study) === manifest.study.fingerprint &&
    study.ensemble.seed === manifest.seed &&
    study.ensemble.replicas === manifest.replicas;
  return {
    what: 'the study is the one the manifest names',
    holds,
    detail: `fingerprint ${manifest.study.fingerprint.slice(0, 12)}`,
  };
}

function checkTally(bundle: string, manifest: Manifest): Check[] {
  const read = (name: string): Float64Array => readNpy(join(bundle, 'tally', `${name}.npy`)).values;
  const counts = read('counts');
  const total = counts.reduce((a, b) => a + b, 0);
  const outcomes = manifest.outcomes.length;
  const halves = read('halves');
  const bySum = (parts: Float64Array[]): boolean =>
    counts.every((n, i) => parts.reduce((sum, part) => sum + part[i]!, 0) === n);
  const half = (h: number): Float64Array =>
    counts.map((_, i) => halves[(Math.floor(i / outcomes) * 2 + h) * outcomes + (i % outcomes)]!);
  const checks: Check[] = [
    {
      what: 'the counts sum to the events tallied',
      holds: total === manifest.ledger.tallied,
      detail: `${total} events`,
    },
    {
      what: 'the halves of each column sum to its counts',
      holds: bySum([half(0), half(1)]),
      detail: `${counts.length} cells`,
    },
  ];
  if (manifest.runs) {
    const runs = read('runs');
    const parts = manifest.runs.map((_, r) => runs.subarray(r * counts.length, (r + 1) * counts.length));
    checks.push({ what: 'the runs sum to the counts', holds: bySum(parts), detail: `${parts.length} runs` });
  }
  return checks;
}

/** A summary computed again on another machine may differ in the last digits of its special functions, no more. */
const SUMMARY_TOLERANCE = 1e-9;

async function checkAgain(bundle: string, manifest: Manifest, study: Study, options: VerifyOptions): Promise<Check[]> {
  const tallied = readCellsOf(bundle, manifest);
  const trueAxis = resolveAxis(study.axes.true);
  const recoAxis = resolveAxis(study.axes.reconstructed);
  const prior = priorOf(study.prior, { ...manifestTally(manifest), cells: tallied }, trueAxis, recoAxis);
  const posterior = posteriorOf(tallied, prior);
  const stored = (name: string): Float64Array => readNpy(join(bundle, 'posterior', `${name}.npy`)).values;
  const summary = summarise(posterior, tallied.events, study.credibility);
  const compare = (what: string, pairs: [string, Float64Array][], tolerance: number): Check => {
    for (const [name, again] of pairs) {
      const found = stored(name);
      const i = again.findIndex((x, at) => !(Math.abs(x - found[at]!) <= tolerance * Math.max(1, Math.abs(x))));
      if (i >= 0)
        return {
          what,
          holds: false,
          detail: `posterior/${name}.npy: ${place(manifest, i)} is ${found[i]}, computed again ${again[i]}`,
        };
    }
    return { what, holds: true, detail: `${posterior.columns} columns` };
  };
  const shapes: [string, Float64Array][] = [['shape', posterior.shape]];
  if (posterior.scale) shapes.push(['scale', posterior.scale]);
  const { mean, sd, lower, upper } = summary;
  return [
    compare('the posterior follows from the tally', shapes, 0),
    compare(
      'means, deviations and intervals follow from it',
      Object.entries({ mean, sd, lower, upper }),
      SUMMARY_TOLERANCE,
    ),
    await checkReplicas(bundle, manifest, posterior, options),
  ];
}

async function checkReplicas(
  bundle: string,
  manifest: Manifest,
  parameters: ReturnType<typeof posteriorOf>,
  options: VerifyOptions,
): Promise<Check> {
  const path = join(bundle, REPLICAS);
  const file = openForReading(path, path);
  const { start } = readNpyHeader(file, path);
  closeSync(file);
  const { seed, replicas } = manifest;
  const mismatch = await checkEnsemble({ ...options, parameters, seed, replicas, path, place: path }, start);
  const what = 'every replica is what seed and tally give, to the bit';
  if (!mismatch) return { what, holds: true, detail: `${replicas} replicas drawn again` };
  const { replica, column, outcome, found, expected } = mismatch;
  const cell = `replica ${replica}, column ${manifest.columns[column]}, outcome ${manifest.outcomes[outcome]}`;
  return { what, holds: false, detail: `${cell} is ${found}, drawn again ${expected}` };
}

function readCellsOf(bundle: string, manifest: Manifest): Cells {
  const read = (name: string): Float64Array => readNpy(join(bundle, 'tally', `${name}.npy`)).values;
  const weighted = manifest.weighted;
  return {
    events: read('counts'),
    weights: weighted ? read('weights') : null,
    squares: weighted ? read('squares') : null,
  };
}

function manifestTally({ columns, outcomes, weighted, ledger, duplicates, trueRange }: Manifest) {
  const none = { events: new Float64Array(0), weights: null, squares: null };
  return {
    columnNames: columns,
    outcomeNames: outcomes,
    weighted,
    ledger,
    duplicates,
    trueRange,
    halves: none,
    runs: null,
    largestSquare: null,
    unmatched: null,
  };
}

function place(manifest: Manifest, i: number): string {
  const outcomes = manifest.outcomes.length;
  return `column ${manifest.columns[Math.floor(i / outcomes)]}, outcome ${manifest.outcomes[i % outcomes]}`;
}
