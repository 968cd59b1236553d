import { createWriteStream } from 'node:fs';
import { extname } from 'node:path';
import { Readable } from 'node:stream';
import { pipeline } from 'node:stream/promises';
import { binCount, binRange, type Axis, type NumericAxis } from '../study/axis';
import { InputError } from '../study/input-error';
import { fitsPrimary, fitsTable, type FitsCard, type FitsColumn } from './fits-table';
import type { HandoverOptions } from './handover-options';
import { readCells, type Bundle } from './open-bundle';
import { rangeOut, replicasOut } from './replicas-out';
import { writeWhole, type WrittenFile } from './whole-file';

/**
 * Writes response files of the open standard OGIP CAL/GEN/92-002 with its addendum 92-002a. The versions are those of
 * the memo's log of changes (matrix 1.3.0 since 1998; several MATRIX extensions of one file are summed since 2020, hence
 * the replicas in a file of their own); lists of keywords and columns were recalled *(memory)*.
 *
 * - `out`: the mean matrix with every loss in it, `SPECRESP MATRIX` and `EBOUNDS`, `HDUCLAS3 = 'FULL'`. A row sums to the
 *   probability of ending in the window: what is lost, below or above is missing from the sum. Where losses are not
 *   recorded it is `MATRIX`, `'REDIST'`, and the next two files are not there.
 * - `...-redistribution`: `MATRIX`, `'REDIST'`: the mean matrix divided by the efficiency, to be used with
 * - `...-efficiency`: `SPECRESP`, the efficiency as the effective area of a detector of 1 cm**2.
 * - `...-replicas`: like `out`, one extension a replica, `EXTVER` being its number in the bundle counted from 1.
 *
 * Energies are in keV; all reals have 4 bytes, as the standard fixes: numbers of the bundle rounded to the nearest.
 * Only bins of the true axis are rows and only bins of the reconstructed axis are channels, counted from 1 (`TLMIN`).
 * Throws `InputError` where an axis is no axis of energies.
 */
export async function writeFits(bundle: Bundle, options: HandoverOptions): Promise<WrittenFile[]> {
  const { from, to } = rangeOut(bundle, options);
  const response = responseOf(bundle);
  const parts: [place: string, hdus: () => Generator<Buffer>][] = [[options.out, () => meanFile(bundle, response)]];
  if (bundle.manifest.lostRecorded) {
    parts.push([besides(options.out, 'redistribution'), () => redistributionFile(bundle, response)]);
    parts.push([besides(options.out, 'efficiency'), () => efficiencyFile(bundle, response)]);
  }
  if (to > from) parts.push([besides(options.out, 'replicas'), () => replicasFile(bundle, response, options)]);
  const write = async (paths: string[]): Promise<void> => {
    for (const [i, [, hdus]] of parts.entries()) {
      await pipeline(Readable.from(hdus()), createWriteStream(paths[i]!), { signal: options.signal });
    }
  };
  return writeWhole(
    parts.map(([place]) => place),
    write,
    options.signal,
  );
}

function besides(out: string, part: string): string {
  const ending = extname(out);
  return `${out.slice(0, out.length - ending.length)}-${part}${ending}`;
}

/** What all extensions share: the bins in keV, and where they stand in a `[columns, outcomes]` array. */
interface Response {
  energies: Float64Array;
  channels: Float64Array;
  rows: { first: number; end: number };
  cells: { first: number; end: number };
  outcomes: number;
  cards: FitsCard[];
}

function responseOf(bundle: Bundle): Response {
  const { axes, manifest, study } = bundle;
  const channels = binCount(axes.reconstructed);
  const cards: FitsCard[] = [
    ['TELESCOP', 'NONE', 'not a telescope: a calibrated detector'],
    ['INSTRUME', study.title],
    ['FILTER', 'NONE'],
    ['CHANTYPE', 'PI', 'bins of the reconstructed axis'],
    ['DETCHANS', channels, 'number of channels'],
    ['HDUCLASS', 'OGIP', 'format conforms to OGIP standards'],
    ['HDUDOC', 'CAL/GEN/92-002 and 92-002a', 'documents that define the format'],
    ['HDUCLAS1', 'RESPONSE'],
    ['CREATOR', `${manifest.program.name} ${manifest.program.version}`],
  ];
  return {
    energies: energiesOf(axes.true, 'true', bundle.folder),
    channels: energiesOf(axes.reconstructed, 'reconstructed', bundle.folder),
    rows: binRange(axes.true),
    cells: binRange(axes.reconstructed),
    outcomes: bundle.outcomes.length,
    cards,
  };
}

const IN_KEV: Record<string, number> = { eV: 1e-3, keV: 1, MeV: 1e3, GeV: 1e6, TeV: 1e9 };

/** Edges in keV as 4-byte reals. */
function energiesOf(axis: Axis, name: string, folder: string): Float64Array {
  const where = `${folder}: axes.${name}`;
  const factor = axis.kind === 'numeric' ? IN_KEV[axis.unit] : undefined;
  if (factor === undefined) {
    const what = axis.kind === 'tags' ? 'tags are no energies' : `the unit "${axis.unit}" is none of energy`;
    const units = Object.keys(IN_KEV).join(', ');
    throw new InputError(
      where,
      what,
      `OGIP response files hold energies (${units}): set the unit, or use another format`,
    );
  }
  const edges = (axis as NumericAxis).edges.map((edge) => Math.fround(edge * factor));
  if (edges.every((edge, i) => Number.isFinite(edge) && (i === 0 || edge > edges[i - 1]!))) return edges;
  throw new InputError(where, 'bins too narrow or energies too large for 4-byte reals', 'use another format');
}

function* meanFile(bundle: Bundle, response: Response): Generator<Buffer> {
  const full = bundle.manifest.lostRecorded;
  const missing = full
    ? 'A row sums to the probability of ending in the window: events that are lost, below the first or above the last channel are missing from the sum.'
    : 'Losses were not recorded: efficiency is not in this matrix. A row sums to the probability of ending in the window; events below the first or above the last channel are missing from the sum.';
  yield fitsPrimary([], [...about(bundle), 'The mean of the posterior of the response matrix.']);
  const means = readCells(bundle, 'posterior/mean');
  yield matrixTable(response, 1, full ? 'FULL' : 'REDIST', (j) => rowOf(means, response, j), [missing]);
  yield boundsTable(response);
}

function* redistributionFile(bundle: Bundle, response: Response): Generator<Buffer> {
  yield fitsPrimary(
    [],
    [...about(bundle), 'Redistribution of detected events: for use with the efficiency in the file beside this.'],
  );
  const means = readCells(bundle, 'posterior/mean');
  const efficiency = efficiencies(bundle, response);
  const shares = (j: number): Float64Array =>
    rowOf(means, response, j).map((p) => (efficiency[j]! > 0 ? p / efficiency[j]! : 0));
  const comment =
    'Mean matrix divided by the efficiency. Detected events below the first or above the last channel are missing from the sum of a row.';
  yield matrixTable(response, 1, 'REDIST', shares, [comment]);
  yield boundsTable(response);
}

function* efficiencyFile(bundle: Bundle, response: Response): Generator<Buffer> {
  yield fitsPrimary(
    [],
    [...about(bundle), 'Detection efficiency: for use with the redistribution in the file beside this.'],
  );
  const cards: FitsCard[] = [...response.cards, ['HDUCLAS2', 'SPECRESP'], ['HDUVERS', '1.1.0'], ['ARFVERSN', '1992a']];
  const columns: FitsColumn[] = [
    ...energyColumns(response),
    { name: 'SPECRESP', type: 'E', unit: 'cm**2', values: efficiencies(bundle, response) },
  ];
  const comment = 'SPECRESP is the efficiency (1 minus the mean of the lost share) times an area of 1 cm**2.';
  yield fitsTable({ name: 'SPECRESP', version: 1, columns, cards, comments: [comment] });
}

function* replicasFile(bundle: Bundle, response: Response, options: HandoverOptions): Generator<Buffer> {
  const warning =
    'Each matrix is one equally probable replica of the response: use them one at a time, never their sum.';
  yield fitsPrimary([], [...about(bundle), warning]);
  yield boundsTable(response);
  const kind = bundle.manifest.lostRecorded ? 'FULL' : 'REDIST';
  const size = bundle.columns.length * bundle.outcomes.length;
  for (const { first, count, values } of replicasOut(bundle, options)) {
    for (let r = 0; r < count; r++) {
      const replica = values.subarray(r * size, (r + 1) * size);
      yield matrixTable(response, first + r + 1, kind, (j) => rowOf(replica, response, j), [warning]);
    }
  }
}

function about(bundle: Bundle): string[] {
  const { manifest } = bundle;
  return [
    `${manifest.title}.`,
    `Study ${manifest.study.fingerprint}, seed ${manifest.seed}.`,
    'Energies are in keV; reals are rounded to 4 bytes. Columns of the true axis outside its bins have no row here.',
    ...manifest.cautions,
  ];
}

/** The channels of true bin `j` (counted without the columns outside) in a `[columns, outcomes]` array. */
function rowOf(cells: Float64Array, { rows, cells: { first, end }, outcomes }: Response, j: number): Float64Array {
  const at = (rows.first + j) * outcomes;
  return cells.subarray(at + first, at + end);
}

/** One minus the lost share of each true bin: the sum of the other outcomes, `lost` being the last. */
function efficiencies(bundle: Bundle, { rows, outcomes }: Response): Float64Array {
  const means = readCells(bundle, 'posterior/mean');
  return Float64Array.from({ length: rows.end - rows.first }, (_, j) => {
    const at = (rows.first + j) * outcomes;
    return means.subarray(at, at + outcomes - 1).reduce((sum, p) => sum + p, 0);
  });
}

function energyColumns({ energies }: Response): FitsColumn[] {
  return [
    { name: 'ENERG_LO', type: 'E', unit: 'keV', values: energies.subarray(0, -1) },
    { name: 'ENERG_HI', type: 'E', unit: 'keV', values: energies.subarray(1) },
  ];
}

type Kind = 'FULL' | 'REDIST';

function matrixTable(
  response: Response,
  version: number,
  kind: Kind,
  row: (j: number) => Float64Array,
  comments: string[],
): Buffer {
  const rows = Array.from({ length: response.energies.length - 1 }, (_, j) => groupsOf(row(j)));
  const channels = response.channels.length - 1;
  const columns: FitsColumn[] = [
    ...energyColumns(response),
    { name: 'N_GRP', type: 'I', values: rows.map(({ starts }) => starts.length) },
    { name: 'F_CHAN', type: 'I', values: rows.map(({ starts }) => starts), legal: [1, channels] },
    { name: 'N_CHAN', type: 'I', values: rows.map(({ lengths }) => lengths) },
    { name: 'MATRIX', type: 'E', values: rows.map(({ elements }) => elements) },
  ];
  const cards: FitsCard[] = [
    ...response.cards,
    ['HDUCLAS2', 'RSP_MATRIX'],
    ['HDUCLAS3', kind, kind === 'FULL' ? 'with every loss' : 'redistribution alone'],
    ['HDUVERS', '1.3.0'],
    ['RMFVERSN', '1992a'],
    ['NUMGRP', rows.reduce((sum, { starts }) => sum + starts.length, 0), 'groups in all'],
    ['NUMELT', rows.reduce((sum, { elements }) => sum + elements.length, 0), 'elements in all'],
    ['LO_THRES', 0, 'elements above it are stored'],
  ];
  return fitsTable({ name: kind === 'FULL' ? 'SPECRESP MATRIX' : 'MATRIX', version, columns, cards, comments });
}

/** Runs of channels with elements above 0 (as 4-byte reals): first channels counted from 1, lengths, elements. */
function groupsOf(row: Float64Array): { starts: number[]; lengths: number[]; elements: number[] } {
  const groups = { starts: [] as number[], lengths: [] as number[], elements: [] as number[] };
  row.forEach((value, k) => {
    if (!(Math.fround(value) > 0)) return;
    const follows = k > 0 && Math.fround(row[k - 1]!) > 0;
    if (follows) groups.lengths[groups.lengths.length - 1]! += 1;
    else groups.starts.push(k + 1);
    if (!follows) groups.lengths.push(1);
    groups.elements.push(value);
  });
  return groups;
}

function boundsTable(response: Response): Buffer {
  const channels = response.channels.length - 1;
  const columns: FitsColumn[] = [
    {
      name: 'CHANNEL',
      type: 'I',
      values: Int16Array.from({ length: channels }, (_, k) => k + 1),
      legal: [1, channels],
    },
    { name: 'E_MIN', type: 'E', unit: 'keV', values: response.channels.subarray(0, -1) },
    { name: 'E_MAX', type: 'E', unit: 'keV', values: response.channels.subarray(1) },
  ];
  const cards: FitsCard[] = [...response.cards, ['HDUCLAS2', 'EBOUNDS'], ['HDUVERS', '1.2.0'], ['RMFVERSN', '1992a']];
  return fitsTable({ name: 'EBOUNDS', version: 1, columns, cards, comments: [] });
}
