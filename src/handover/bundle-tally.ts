import { existsSync, readFileSync, statSync } from 'node:fs';
import { join } from 'node:path';
import { InputError } from '../study/input-error';
import type { Cells, Tally } from '../tally/tally';
import { analyse, type Analysis } from './analyse';
import { readArray, type Bundle } from './open-bundle';

/** The tally that a bundle holds. Throws `InputError` where an array that its study asks for is not there. */
export function bundleTally(bundle: Bundle): Tally {
  const { columns, outcomes, manifest, study } = bundle;
  const { weighted, ledger, duplicates, trueRange, runs } = manifest;
  const counted = study.unmatched === 'count';
  return {
    columnNames: columns,
    outcomeNames: outcomes,
    weighted,
    cells: cellsOf(bundle, 'counts', ''),
    halves: cellsOf(bundle, 'halves', 'halves-'),
    runs: runs && { labels: runs, cells: cellsOf(bundle, 'runs', 'runs-') },
    largestSquare: weighted ? needed(bundle, 'largest-square') : null,
    unmatched: counted ? cellsOf(bundle, 'unmatched', 'unmatched-') : null,
    trueRange,
    ledger,
    duplicates,
  };
}

/** Everything that follows from a bundle's study and tally, worked out again: `analyse` with the bundle's own tables. */
export function analyseBundle(bundle: Bundle): Analysis {
  const where = join(bundle.folder, 'study.json');
  return analyse(bundle.study, bundleTally(bundle), { where, readTable: () => referenceTable(bundle) });
}

function cellsOf(bundle: Bundle, events: string, ofWeights: string): Cells {
  const weight = (name: string): Float64Array | null =>
    bundle.manifest.weighted ? needed(bundle, `${ofWeights}${name}`) : null;
  return { events: needed(bundle, events), weights: weight('weights'), squares: weight('squares') };
}

function needed(bundle: Bundle, name: string): Float64Array {
  const array = readArray(bundle, `tally/${name}`);
  if (array) return array.values;
  throw new InputError(join(bundle.folder, 'tally', `${name}.npy`), 'no such array', DAMAGED);
}

const DAMAGED = 'the bundle is damaged or of another version: build it again';

/** A table of a spectrum is a few kilobytes; a file beyond this is something else. */
const MOST_TABLE_BYTES = 16 << 20;

/** The text of the table that a bundle keeps of its reference spectrum. Throws `InputError` where there is none. */
export function referenceTable({ folder }: Bundle): string {
  const path = join(folder, 'reference.csv');
  if (existsSync(path) && statSync(path).size <= MOST_TABLE_BYTES) return readFileSync(path, 'utf8');
  throw new InputError(path, 'the reference table cannot be read', DAMAGED);
}
