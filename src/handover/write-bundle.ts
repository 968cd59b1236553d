import type { Audit } from '../audit/audit';
import type { Flag } from '../audit/flag';
import { isAbsent } from '../audit/measure';
import { BLOCK } from '../ensemble/draw';
import type { Posterior } from '../posterior/posterior';
import type { Summary } from '../posterior/summary';
import { studyFingerprint } from '../study/fingerprint';
import { binRange, type Axis } from '../study/axis';
import type { Study } from '../study/study';
import type { Cells, Tally } from '../tally/tally';
import { CAUTIONS } from './cautions';
import { csvRow, csvTable } from './csv-table';
import type { FolderInTheMaking } from './folder-in-the-making';
import { BUNDLE_SCHEMA, type Manifest } from './manifest';

/** Everything a bundle holds besides the ensemble. */
export interface BundleContents {
  version: string;
  study: Study;
  trueAxis: Axis;
  inputs: Manifest['inputs'];
  tally: Tally;
  posterior: Posterior;
  summary: Summary;
  audit: Audit;
  rejectedRows: Iterable<{ file: string; place: number; column: string | null; value: string | null; reason: string }>;
}

/** The file that marks a folder as a bundle; it is written last. */
export const MANIFEST = 'manifest.json';
export const REPLICAS = 'replicas.npy';

/** Writes every file of a bundle but the ensemble and the manifest. */
export function writeBundleFiles(folder: FolderInTheMaking, contents: BundleContents): void {
  const { study, audit } = contents;
  folder.write('study.json', json(study));
  writeTally(folder, contents.tally);
  writePosterior(folder, contents);
  folder.write('columns.csv', columnsTable(contents));
  folder.stream('cells.csv', (put) => {
    for (const piece of cellsTable(contents)) put(Buffer.from(piece));
  });
  folder.write('flags.json', json(audit.flags));
  folder.write('audit.json', json(audit.measures));
  folder.stream('rejects.csv', (put) => {
    put(Buffer.from(csvRow(['file', 'line', 'column', 'value', 'reason'])));
    for (const { file, place, column, value, reason } of contents.rejectedRows) {
      put(Buffer.from(csvRow([file, place, column, value, reason])));
    }
  });
}

/** Writes the manifest over everything that stands in the folder. Returns it. */
export function writeManifest(folder: FolderInTheMaking, contents: BundleContents): Manifest {
  const { study, tally, audit, version, inputs } = contents;
  const state = (wanted: Flag['state']): number => audit.flags.filter((flag) => flag.state === wanted).length;
  const manifest: Manifest = {
    schema: BUNDLE_SCHEMA,
    program: { name: 'entasis', version },
    title: study.title,
    study: { fingerprint: studyFingerprint(study) },
    inputs,
    seed: study.ensemble.seed,
    replicas: study.ensemble.replicas,
    blockSize: BLOCK,
    columns: tally.columnNames,
    outcomes: tally.outcomeNames,
    runs: tally.runs?.labels ?? null,
    weighted: tally.weighted,
    lostRecorded: study.lost === 'missing',
    credibility: study.credibility,
    ledger: tally.ledger,
    flags: { flagged: state('flagged'), undecided: state('undecided') },
    arrays: folder.arrays,
    files: folder.files,
    duplicates: tally.duplicates,
    trueRange: tally.trueRange,
    cautions: [...CAUTIONS],
  };
  folder.write(MANIFEST, json(manifest));
  return manifest;
}

/** The layout of `replicas.npy`. */
export function describeReplicas(folder: FolderInTheMaking, shape: number[]): void {
  folder.arrays[REPLICAS] = {
    type: '<f8',
    shape,
    axes: ['replica', 'column', 'outcome'],
    holds: 'outcome probabilities of each column, drawn from its posterior; each column sums to 1',
  };
}

function writeTally(folder: FolderInTheMaking, tally: Tally): void {
  const [columns, outcomes] = [tally.columnNames.length, tally.outcomeNames.length];
  const put = (name: string, ofWeights: string, cells: Cells, shape: number[], axes: string[]): void => {
    folder.array(`tally/${name}.npy`, '<i8', shape, cells.events, axes, 'events');
    if (cells.weights)
      folder.array(`tally/${ofWeights}weights.npy`, '<f8', shape, cells.weights, axes, 'sum of weights');
    if (cells.squares) {
      folder.array(`tally/${ofWeights}squares.npy`, '<f8', shape, cells.squares, axes, 'sum of squared weights');
    }
  };
  put('counts', '', tally.cells, [columns, outcomes], ['column', 'outcome']);
  put('halves', 'halves-', tally.halves, [columns, 2, outcomes], ['column', 'half', 'outcome']);
  if (tally.runs) {
    const shape = [tally.runs.labels.length, columns, outcomes];
    put('runs', 'runs-', tally.runs.cells, shape, ['run', 'column', 'outcome']);
  }
  if (tally.largestSquare) {
    const holds = 'largest squared weight of one event';
    folder.array('tally/largest-square.npy', '<f8', [columns], tally.largestSquare, ['column'], holds);
  }
  if (tally.unmatched) put('unmatched', 'unmatched-', tally.unmatched, [outcomes], ['outcome']);
}

function writePosterior(folder: FolderInTheMaking, { posterior, summary }: BundleContents): void {
  const shape = [posterior.columns, posterior.outcomes];
  const axes = ['column', 'outcome'];
  const put = (name: string, values: Float64Array, holds: string): void =>
    folder.array(`posterior/${name}.npy`, '<f8', shape, values, axes, holds);
  const kind = posterior.scale ? 'gamma shapes, before normalising' : 'Dirichlet parameters';
  put('shape', posterior.shape, kind);
  if (posterior.scale) put('scale', posterior.scale, 'gamma scales, before normalising');
  put('mean', summary.mean, 'posterior means');
  put('sd', summary.sd, 'posterior standard deviations');
  put('lower', summary.lower, 'lower ends of the equal-tailed intervals; 0 in cells without events');
  put('upper', summary.upper, 'upper ends of the equal-tailed intervals; one-sided limits in cells without events');
}

/** One row a column: its edges, its population, every measure with its interval, and its flags. */
function columnsTable({ tally, trueAxis, audit, summary }: BundleContents): string {
  const names = tally.columnNames;
  const data: Record<string, readonly unknown[]> = { column: names, ...edgesOf(trueAxis, names) };
  const outcomes = tally.outcomeNames.length;
  const sums = (values: Float64Array): number[] =>
    names.map((_, j) => values.subarray(j * outcomes, (j + 1) * outcomes).reduce((a, b) => a + b, 0));
  data['events'] = sums(tally.cells.events);
  if (tally.cells.weights) data['weight'] = sums(tally.cells.weights);
  for (const [name, measure] of Object.entries(audit.measures.columns)) {
    if (isAbsent(measure)) continue;
    data[name] = measure.value;
    if (measure.lower.every((end) => end === null)) continue;
    data[`${name}_lower`] = measure.lower;
    data[`${name}_upper`] = measure.upper;
  }
  data['interval_method'] = summary.method;
  for (const state of ['flagged', 'undecided'] as const) {
    const ids = (name: string): string[] =>
      audit.flags.filter((flag) => flag.column === name && flag.state === state).map(({ id }) => id);
    data[state] = names.map((name) => ids(name).join(' '));
  }
  return csvTable(data);
}

function edgesOf(axis: Axis, names: readonly string[]): Record<string, (number | null)[]> {
  if (axis.kind === 'tags') return {};
  const { first, end } = binRange(axis);
  const edge = (j: number): number | null => (j >= 0 && j < axis.edges.length ? axis.edges[j]! : null);
  return {
    lower_edge: names.map((_, j) => (j === first - 1 ? null : edge(j - first))),
    upper_edge: names.map((_, j) => (j === end ? null : edge(j - first + 1))),
  };
}

/** Rows of the cell table made at once: a matrix of any size is written in bounded memory. */
const COLUMNS_AT_ONCE = 64;

function* cellsTable({ tally, posterior, summary }: BundleContents): Generator<string> {
  const outcomes = tally.outcomeNames.length;
  for (let first = 0; first < tally.columnNames.length; first += COLUMNS_AT_ONCE) {
    const columns = tally.columnNames.slice(first, first + COLUMNS_AT_ONCE);
    const part = (values: Float64Array): Float64Array =>
      values.subarray(first * outcomes, (first + columns.length) * outcomes);
    const { events, weights, squares } = tally.cells;
    const data: Record<string, ArrayLike<unknown>> = {
      column: columns.flatMap((name) => tally.outcomeNames.map(() => name)),
      outcome: columns.flatMap(() => tally.outcomeNames),
      events: part(events),
    };
    if (weights && squares) Object.assign(data, { weight: part(weights), squared_weight: part(squares) });
    data['shape'] = part(posterior.shape);
    if (posterior.scale) data['scale'] = part(posterior.scale);
    for (const name of ['mean', 'sd', 'lower', 'upper'] as const) data[name] = part(summary[name]);
    yield csvTable(data, first === 0);
  }
}

function json(value: unknown): string {
  return `${JSON.stringify(value, null, 1)}\n`;
}
