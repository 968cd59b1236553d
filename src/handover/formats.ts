import type { HandoverOptions } from './handover-options';
import type { Bundle } from './open-bundle';
import type { WrittenFile } from './whole-file';
import { writeArrow } from './write-arrow';
import { writeCsv } from './write-csv';
import { writeFits } from './write-fits';
import { writeHdf5 } from './write-hdf5';
import { writeNpz } from './write-npz';
import { writeParameters } from './write-parameters';
import { writeParquet } from './write-parquet';

export const FORMAT_IDS = ['npz', 'hdf5', 'parquet', 'arrow', 'csv', 'json', 'fits'] as const;
export type FormatId = (typeof FORMAT_IDS)[number];

/** A format that a bundle can be handed over in: the one table of command line and window. */
export interface HandoverFormat {
  id: FormatId;
  title: string;
  /** Endings a file of it may have, the usual one first. */
  endings: string[];
  /** What the files hold, for the person who chooses. */
  holds: string;
  /** Whether replicas are in it, so that a range of them can be asked for. */
  replicas: boolean;
  /** Whether every number of the bundle reads back to the bit. */
  lossless: boolean;
  /** Whether the same bundle and replicas give the same bytes. */
  reproducible: boolean;
  /** Writes `options.out` and what stands beside it. All of it or nothing. */
  write(bundle: Bundle, options: HandoverOptions): Promise<WrittenFile[]>;
}

export const FORMATS: readonly HandoverFormat[] = [
  {
    id: 'npz',
    title: 'NumPy archive (NPZ)',
    endings: ['.npz'],
    holds: 'every array of the bundle in one file, under its name in the folder',
    replicas: true,
    lossless: true,
    reproducible: true,
    write: writeNpz,
  },
  {
    id: 'hdf5',
    title: 'HDF5',
    endings: ['.h5', '.hdf5'],
    holds: 'every array of the bundle, with names, axes, units, seed and fingerprint as attributes; replicas in chunks',
    replicas: true,
    lossless: true,
    // The library stamps every object with the time.
    reproducible: false,
    write: writeHdf5,
  },
  {
    id: 'parquet',
    title: 'Parquet',
    endings: ['.parquet'],
    holds: 'the ensemble as a long table (replica, column, outcome, p); beside it the summary of the cells',
    replicas: true,
    lossless: true,
    reproducible: true,
    write: writeParquet,
  },
  {
    id: 'arrow',
    title: 'Arrow',
    endings: ['.arrow'],
    holds: 'the ensemble as a long table (replica, column, outcome, p); beside it the summary of the cells',
    replicas: true,
    lossless: true,
    reproducible: true,
    write: writeArrow,
  },
  {
    id: 'csv',
    title: 'CSV',
    endings: ['.csv'],
    holds: 'the ensemble as a long table (replica, column, outcome, p); beside it the summary of the cells',
    replicas: true,
    lossless: true,
    reproducible: true,
    write: writeCsv,
  },
  {
    id: 'json',
    title: 'Parameters for samplers (JSON)',
    endings: ['.json'],
    holds:
      'Dirichlet and sequential-Beta parameters of every column, or gamma shapes and scales where events are weighted; no replicas',
    replicas: false,
    lossless: true,
    reproducible: true,
    write: writeParameters,
  },
  {
    id: 'fits',
    title: 'OGIP response files (FITS)',
    endings: ['.fits', '.rsp', '.rmf'],
    holds:
      'the mean matrix of the bins as a response file in keV; beside it redistribution, efficiency and the replicas',
    replicas: true,
    // Reals of 4 bytes, as the standard fixes.
    lossless: false,
    reproducible: true,
    write: writeFits,
  },
];

/** The format of an id. Throws `RangeError` for another text. */
export function formatOf(id: string): HandoverFormat {
  const format = FORMATS.find((candidate) => candidate.id === id);
  if (!format) throw new RangeError(`no format "${id}"`);
  return format;
}
