import { closeSync, existsSync, readFileSync, readdirSync, statSync } from 'node:fs';
import { join, relative, sep } from 'node:path';
import { modelOf, type Model } from '../src/handover/analyse';
import { bundleTally } from '../src/handover/bundle-tally';
import { parseManifest, type Manifest } from '../src/handover/manifest';
import { openForReading, readNpyHeader } from '../src/handover/npy';
import { openBundle, readCells, type Bundle } from '../src/handover/open-bundle';
import { MANIFEST, REPLICAS } from '../src/handover/write-bundle';
import { summarise } from '../src/posterior/summary';
import { studyFingerprint } from '../src/study/fingerprint';
import { InputError } from '../src/study/input-error';
import type { Study } from '../src/study/study';
import { ledgerBalances } from '../src/tally/ledger';
import type { Tally } from '../src/tally/tally';
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
    const opened = openBundle(bundle);
    const tally = bundleTally(opened);
    checks.push(checkStudy(opened.study, manifest), ...checkTally(tally));
    checks.push(...(await checkAgain(opened, modelOf(opened.study, tally), options)));
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

/** The laws of a tally: every event is in one cell, and the halves and the runs of a column sum to it. */
function checkTally({ cells, halves, runs, ledger, outcomeNames }: Tally): Check[] {
  const counts = cells.events;
  const outcomes = outcomeNames.length;
  const total = counts.reduce((a, b) => a + b, 0);
  const half = (h: number): Float64Array =>
    counts.map((_, i) => halves.events[(Math.floor(i / outcomes) * 2 + h) * outcomes + (i % outcomes)]!);
  const sumUp = (parts: Float64Array[]): boolean =>
    counts.every((n, i) => parts.reduce((sum, part) => sum + part[i]!, 0) === n);
  const checks: Check[] = [
    { what: 'the counts sum to the events tallied', holds: total === ledger.tallied, detail: `${total} events` },
    {
      what: 'the halves of each column sum to its counts',
      holds: sumUp([half(0), half(1)]),
      detail: `${counts.length} cells`,
    },
  ];
  if (runs) {
    const parts = runs.labels.map((_, r) => runs.cells.events.subarray(r * counts.length, (r + 1) * counts.length));
    checks.push({ what: 'the runs sum to the counts', holds: sumUp(parts), detail: `${parts.length} runs` });
  }
  return checks;
}

/** A summary computed again on another machine may differ in the last digits of its special functions, no more. */
const SUMMARY_TOLERANCE = 1e-9;

async function checkAgain(bundle: Bundle, model: Model, options: VerifyOptions): Promise<Check[]> {
  const { posterior, tally, study } = model;
  const { mean, sd, lower, upper } = summarise(posterior, tally.cells.events, study.credibility);
  const shapes: [string, Float64Array][] = [['shape', posterior.shape]];
  if (posterior.scale) shapes.push(['scale', posterior.scale]);
  const summary = Object.entries({ mean, sd, lower, upper });
  return [
    checkPosterior(bundle, 'the posterior follows from the tally', shapes, 0),
    checkPosterior(bundle, 'means, deviations and intervals follow from it', summary, SUMMARY_TOLERANCE),
    await checkReplicas(bundle, model, options),
  ];
}

function checkPosterior(bundle: Bundle, what: string, again: [string, Float64Array][], tolerance: number): Check {
  for (const [name, values] of again) {
    const found = readCells(bundle, `posterior/${name}`);
    const i = values.findIndex((x, at) => !(Math.abs(x - found[at]!) <= tolerance * Math.max(1, Math.abs(x))));
    if (i < 0) continue;
    const detail = `posterior/${name}.npy: ${cellName(bundle, i)} is ${found[i]}, computed again ${values[i]}`;
    return { what, holds: false, detail };
  }
  return { what, holds: true, detail: `${bundle.columns.length} columns` };
}

async function checkReplicas(bundle: Bundle, { posterior }: Model, options: VerifyOptions): Promise<Check> {
  const { manifest, outcomes } = bundle;
  const { seed, replicas } = manifest;
  const path = join(bundle.folder, REPLICAS);
  const { start } = bundle.arrays.get('replicas')!;
  const drawing = { ...options, parameters: posterior, seed, replicas, path, place: path };
  const mismatch = await checkEnsemble(drawing, start);
  const what = 'every replica is what seed and tally give, to the bit';
  if (!mismatch) return { what, holds: true, detail: `${replicas} replicas drawn again` };
  const { replica, column, outcome, found, expected } = mismatch;
  const cell = `replica ${replica}, ${cellName(bundle, column * outcomes.length + outcome)}`;
  return { what, holds: false, detail: `${cell} is ${found}, drawn again ${expected}` };
}

function cellName({ columns, outcomes }: Bundle, i: number): string {
  return `column ${columns[Math.floor(i / outcomes.length)]}, outcome ${outcomes[i % outcomes.length]}`;
}
