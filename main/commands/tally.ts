import { dirname, resolve } from 'node:path';
import { expandFiles } from '../../src/study/paths';
import type { Surroundings } from '../surroundings';
import { combineParts, writePart, type TallyPart } from '../parts';
import { ProgressLine } from '../progress-line';
import { readEvents } from '../read-events';
import { readStudyFile } from '../study-file';
import { ledgerText } from './wording';

/** `entasis tally STUDY --out PART`: the tally of some of a study's files. */
export async function tally(
  path: string,
  flags: { out: string; files?: string[]; workers: number; json?: boolean },
  around: Surroundings,
): Promise<void> {
  const study = readStudyFile(path);
  const folder = dirname(resolve(path));
  const files = flags.files && expandFiles(flags.files, folder, '--files', 'pattern');
  const line = new ProgressLine();
  const onProgress = line.show.bind(line);
  const reading = await readEvents({
    study,
    folder,
    where: path,
    ...(files && { files }),
    ...around,
    workers: flags.workers,
    onProgress,
  });
  try {
    writePart(flags.out, reading);
    line.clear();
    report(flags, reading);
  } finally {
    await reading.close();
  }
}

/** `entasis combine PART... --out PART`. */
export async function combine(paths: string[], flags: { out: string; json?: boolean }): Promise<void> {
  const parts = await combineParts(paths, null);
  try {
    writePart(flags.out, parts);
    report(flags, parts);
  } finally {
    parts.close();
  }
}

function report({ out, json }: { out: string; json?: boolean }, { sums, inputs }: TallyPart): void {
  const part = resolve(out);
  const text = json
    ? JSON.stringify({ part, ledger: sums.ledger, inputs })
    : [...ledgerText(sums.ledger, inputs.length), `part: ${part}`].join('\n');
  process.stdout.write(`${text}\n`);
}
