import { readFileSync, statSync } from 'node:fs';
import { resolve } from 'node:path';
import { InputError } from '../../src/study/input-error';
import type { Study, StudyInput } from '../../src/study/study';
import type { TallyView } from '../bridge';
import { Latest } from '../session/latest';
import type { Job } from '../session/jobs';
import { Refused } from '../session/refusal';
import type { KeyedTally, StudyFiles } from '../session/study-events';
import type { ColumnMeasures } from '../workers/views/column-measures';
import { studyFiles } from './event-calls';
import type { Desk, Handlers } from './handlers';

type MatrixCall = 'tally' | 'posterior' | 'cell' | 'column' | 'replicas' | 'audit';

/** Tally, posterior, replicas and audit of the study as it stands. */
export function matrixCalls(desk: Desk): Handlers<MatrixCall> {
  const [tallies, posteriors, audits] = [new Latest(), new Latest(), new Latest()];
  return {
    tally: ({ study, folder, job }) =>
      tallies.run(() =>
        job === undefined
          ? tallyView(desk, studyFiles(desk, study, folder))
          : desk.jobs.run(job, (running) => tallyView(desk, studyFiles(desk, study, folder), running)),
      ),
    posterior: ({ study, folder }) =>
      posteriors.run(async () => desk.matrix.ask(...(await at(desk, study, folder, 'posterior')))),
    cell: async ({ study, folder, column, outcome }) => {
      const { tally, argument } = await atTally(desk, study, folder);
      return desk.matrix.ask(tally, 'cell', { ...argument, column, outcome });
    },
    column: async ({ study, folder, column }) => {
      const { tally, argument } = await atTally(desk, study, folder);
      return desk.matrix.ask(tally, 'column', { ...argument, column });
    },
    replicas: async ({ study, folder, indices }) => {
      const { tally, argument } = await atTally(desk, study, folder);
      return desk.matrix.ask(tally, 'replicas', { ...argument, indices });
    },
    audit: ({ study, folder }) => audits.run(async () => desk.audits.ask(...(await at(desk, study, folder, 'audit')))),
  };
}

/** The tally of a study whose events are read already. Throws `Refused` where they are not: the page reads with a job. */
export async function atTally(desk: Desk, input: StudyInput, folder: string) {
  const files = studyFiles(desk, input, folder);
  if (!desk.events.known(files)) throw new Refused('not-read', 'events', 'not read yet', 'read the events first');
  const tally = await desk.events.tally(files, {});
  return { files, tally, argument: { study: files.study, referenceTable: referenceTable(desk, files.study, folder) } };
}

type AtTally = Awaited<ReturnType<typeof atTally>>;

async function at<N extends 'posterior' | 'audit'>(
  desk: Desk,
  study: StudyInput,
  folder: string,
  name: N,
): Promise<[KeyedTally, N, AtTally['argument']]> {
  const { tally, argument } = await atTally(desk, study, folder);
  return [tally, name, argument];
}

/** A table of a reference spectrum is a few kilobytes. */
const MOST_TABLE_BYTES = 16 * 2 ** 20;

/** Text of the table file that the study's reference spectrum names, if it names one. */
export function referenceTable({ chosen }: Desk, { reference }: Study, folder: string): string | null {
  if (reference.kind !== 'table') return null;
  const path = chosen.mayRead(resolve(folder, reference.file!));
  if (statSync(path).size > MOST_TABLE_BYTES)
    throw new InputError(path, 'too large for a table', 'give lo, hi, content rows');
  return readFileSync(path, 'utf8');
}

async function tallyView(desk: Desk, files: StudyFiles, job?: Job): Promise<TallyView> {
  const began = desk.now();
  const keyed = await desk.events.tally(files, job ? { signal: job.signal, onProgress: job.progress } : {});
  const argument = { study: files.study, referenceTable: null };
  const measures = await desk.matrix.ask(keyed, 'measures', argument);
  return viewOf(keyed, measures, (desk.now() - began) / 1000);
}

function viewOf({ tally, wasRead }: KeyedTally, measures: ColumnMeasures, seconds: number): TallyView {
  const { columnNames, outcomeNames, weighted, cells, runs, ledger, duplicates } = tally;
  return {
    columnNames,
    outcomeNames,
    weighted,
    ...cells,
    runs: runs && { labels: runs.labels, events: runs.cells.events },
    ledger,
    ...measures,
    duplicates,
    readAgain: wasRead,
    seconds,
  };
}
