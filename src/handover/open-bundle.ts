import { closeSync, readFileSync, statSync } from 'node:fs';
import { join } from 'node:path';
import { columnNames, outcomeNames, type Axis } from '../study/axis';
import { InputError } from '../study/input-error';
import { parseStudyText, resolveAxis, type Study } from '../study/study';
import { parseManifest, type BundleArray, type Manifest } from './manifest';
import { NPY_ITEM_BYTES, openForReading, readNpy, readNpyHeader, readNpyPart } from './npy';
import type { NpyArray, NpyHeader } from './npy';
import { MANIFEST } from './write-bundle';

/** Whole replicas (or other slabs of an array), `[count, columns, outcomes]`, the first of them number `first`. */
export interface ReplicaBlock {
  first: number;
  count: number;
  values: Float64Array;
}

/** A bundle opened for reading. Arrays are read when asked for; no file stays open. */
export interface Bundle {
  folder: string;
  manifest: Manifest;
  study: Study;
  axes: { true: Axis; reconstructed: Axis };
  columns: string[];
  outcomes: string[];
  /** How many replicas it holds. */
  replicas: number;
  /** The arrays there are, by name (`tally/counts`, `replicas`, ...), with their checked headers. */
  arrays: Map<string, NpyHeader>;
}

/** What every bundle holds, and the axes of each: without one of them it is no whole bundle. */
const NEEDED: Record<string, string[]> = {
  'tally/counts': ['column', 'outcome'],
  'posterior/shape': ['column', 'outcome'],
  'posterior/mean': ['column', 'outcome'],
  'posterior/sd': ['column', 'outcome'],
  'posterior/lower': ['column', 'outcome'],
  'posterior/upper': ['column', 'outcome'],
  replicas: ['replica', 'column', 'outcome'],
};
const ENDING = '.npy';
const DAMAGED = 'the bundle is damaged: build or copy it again';

/** Largest JSON document of a bundle that is read: a manifest of thousands of bins and files is below 10 MB. */
const MOST_JSON_BYTES = 256 * 2 ** 20;
/** Replicas are read in blocks of about this many bytes, and of one replica at the least. */
const BLOCK_BYTES = 4 * 2 ** 20;

/**
 * Opens a bundle folder: checks manifest and study, and the header and length of every array against them.
 * Throws `InputError` at the first fault. The numbers themselves are checked by `verify`, not here.
 */
export function openBundle(folder: string): Bundle {
  const manifestPath = join(folder, MANIFEST);
  const manifest = parseManifest(readText(manifestPath), manifestPath);
  const { columns, outcomes } = manifest;
  const studyPath = join(folder, 'study.json');
  const study = parseStudyText(readText(studyPath), studyPath);
  const arrays = new Map<string, NpyHeader>();
  for (const [file, layout] of Object.entries(manifest.arrays)) {
    checkLayout(manifest, file, layout, manifestPath);
    arrays.set(file.slice(0, -ENDING.length), checkedHeader(join(folder, file), layout));
  }
  for (const [name, wanted] of Object.entries(NEEDED)) {
    if (manifest.arrays[name + ENDING]?.axes.join() === wanted.join()) continue;
    throw new InputError(`${manifestPath}: arrays`, `no ${name}${ENDING} of [${wanted.join(', ')}]`, DAMAGED);
  }
  const axes = { true: resolveAxis(study.axes.true), reconstructed: resolveAxis(study.axes.reconstructed) };
  checkNames(manifest, study, axes, studyPath);
  return { folder, manifest, study, axes, columns, outcomes, replicas: arrays.get('replicas')!.shape[0]!, arrays };
}

/** One array of a bundle, whole; `null` where the bundle has no such array. Not for `replicas`: read these in blocks. */
export function readArray(bundle: Bundle, name: string): NpyArray | null {
  return bundle.arrays.has(name) ? readNpy(arrayPath(bundle.folder, name)) : null;
}

/** The values of an array that every bundle has. */
export function readCells(bundle: Bundle, name: string): Float64Array {
  return readArray(bundle, name)!.values;
}

/** Replicas `[from, to)` in blocks of bounded size. Each block's array is new and the caller's to keep. */
export function replicaBlocks(bundle: Bundle, from = 0, to = bundle.replicas): Generator<ReplicaBlock> {
  return arrayBlocks(bundle, 'replicas', from, to);
}

/** An array in blocks of bounded size along its first axis, as `replicaBlocks` gives the replicas. */
export function* arrayBlocks(bundle: Bundle, name: string, from: number, to: number): Generator<ReplicaBlock> {
  const path = arrayPath(bundle.folder, name);
  const fd = openForReading(path, path);
  try {
    const header = readNpyHeader(fd, path);
    const cells = header.shape.slice(1).reduce((product, n) => product * n, 1);
    const each = Math.max(1, Math.floor(BLOCK_BYTES / (cells * NPY_ITEM_BYTES)));
    for (let first = from; first < to; first += each) {
      const count = Math.min(each, to - first);
      const values = readNpyPart(fd, header, first * cells, (first + count) * cells, path);
      yield { first, count, values };
    }
  } finally {
    closeSync(fd);
  }
}

/** Where an array of a bundle lies. */
export function arrayPath(folder: string, name: string): string {
  return `${join(folder, ...name.split('/'))}.npy`;
}

/** The lengths of an array's axes must be those that the manifest gives elsewhere. */
function checkLayout(manifest: Manifest, file: string, layout: BundleArray, where: string): void {
  const lengths: Record<string, number> = {
    replica: manifest.replicas,
    column: manifest.columns.length,
    outcome: manifest.outcomes.length,
    run: manifest.runs?.length ?? 0,
    half: 2,
  };
  const fits =
    layout.axes.length === layout.shape.length && layout.axes.every((a, i) => lengths[a] === layout.shape[i]);
  if (fits && file.endsWith(ENDING)) return;
  const what = `shape (${layout.shape.join(', ')}) of [${layout.axes.join(', ')}] does not fit the names`;
  throw new InputError(`${where}: arrays.${file}`, what, DAMAGED);
}

function checkedHeader(path: string, layout: BundleArray): NpyHeader {
  const fd = openForReading(path, path);
  try {
    const header = readNpyHeader(fd, path);
    const [found, wanted] = [header, layout].map(({ type, shape }) => `${type} (${shape.join(', ')})`);
    if (found !== wanted) throw new InputError(path, `${found} where the manifest says ${wanted}`, DAMAGED);
    return header;
  } finally {
    closeSync(fd);
  }
}

/** Axes and names say the same, else the numbers would be read against wrong bins. */
function checkNames(manifest: Manifest, study: Study, axes: Bundle['axes'], where: string): void {
  const columns = columnNames(axes.true);
  const outcomes = outcomeNames(axes.reconstructed, study.lost === 'missing');
  if (columns.join('\n') === manifest.columns.join('\n') && outcomes.join('\n') === manifest.outcomes.join('\n'))
    return;
  throw new InputError(`${where}: axes`, 'other bins than the manifest names', DAMAGED);
}

function readText(path: string): string {
  const facts = statSync(path, { throwIfNoEntry: false });
  if (!facts?.isFile()) throw new InputError(path, 'no such file', 'name a bundle folder, as entasis build writes it');
  if (facts.size > MOST_JSON_BYTES) throw new InputError(path, `${facts.size} bytes of JSON`, 'name a bundle folder');
  return readFileSync(path, 'utf8');
}
