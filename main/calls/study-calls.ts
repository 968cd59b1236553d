import { readFileSync, statSync } from 'node:fs';
import { basename, dirname, isAbsolute, relative, resolve, sep } from 'node:path';
import { InputError } from '../../src/study/input-error';
import { expandFiles } from '../../src/study/paths';
import { parseStudy, parseStudyText, type Study, type StudyInput } from '../../src/study/study';
import type { ChosenFile, OpenedStudy, Refusal, SavedStudy } from '../bridge';
import { refusalOf } from '../session/refusal';
import { chooseFile, writeWhole } from './file-calls';
import type { Desk, Handlers } from './handlers';

/** A study of thousands of edges is well below this: a larger file is something else. */
const MOST_STUDY_BYTES = 16 * 2 ** 20;

type StudyCall = 'openStudy' | 'saveStudy' | 'keepDraft' | 'dropDraft' | 'recentStudies' | 'forgetStudy' | 'setTitle';

/** Opening, saving and remembering study documents. */
export function studyCalls(desk: Desk): Handlers<StudyCall> {
  const { keepsakes } = desk;
  return {
    openStudy: ({ path }) => openStudy(desk, path),
    saveStudy: ({ study, folder, path, replace }) => saveStudy(desk, study, folder, path, replace),
    keepDraft({ study, folder, path }) {
      const saved = Date.now();
      keepsakes.keepDraft({ study, folder, path, saved });
      return { saved };
    },
    dropDraft() {
      keepsakes.dropDraft();
      return true;
    },
    recentStudies: () => keepsakes.recent(),
    forgetStudy: ({ path }) => keepsakes.forget(path),
    setTitle({ title, edited }) {
      desk.desktop?.setTitle(title, edited);
      return desk.desktop !== null;
    },
  };
}

/** Opens a study and takes what it names as chosen: its files for reading, its own place for saving. */
function openStudy(desk: Desk, path: string): OpenedStudy {
  // What was named on the command line, or is installed with the program, may stand in a hidden folder.
  const trusted = path === desk.demonstration || path === desk.open;
  const full = desk.chosen.file(path, trusted);
  const size = statSync(full, { throwIfNoEntry: false })?.size ?? 0;
  if (!/\.json$/i.test(full)) throw new InputError(path, 'not a study', 'choose a file that ends with .study.json');
  if (size > MOST_STUDY_BYTES) throw new InputError(path, `${size} bytes are too many for a study`, 'choose a study');
  const text = readFileSync(full, 'utf8');
  const study = parseStudyText(text, basename(full));
  const folder = dirname(full);
  if (path !== desk.demonstration) desk.chosen.place(full, 'study', trusted);
  desk.keepsakes.remember(full, study.title, Date.now());
  return { path: full, folder, study, text, ...filesOfStudy(desk, study, folder, trusted) };
}

function filesOfStudy(
  desk: Desk,
  study: Study,
  folder: string,
  trusted: boolean,
): { files: ChosenFile[]; problems: Refusal[] } {
  const files = new Map<string, ChosenFile>();
  const problems: Refusal[] = [];
  const attempt = (work: () => void): void => {
    try {
      work();
    } catch (error) {
      problems.push(refusalOf(error));
    }
  };
  study.events.files.forEach((_, i) =>
    attempt(() => {
      for (const file of filesAt(study, i, folder)) files.set(file.path, chooseFile(desk, file, trusted));
    }),
  );
  const table = study.reference.file;
  if (table !== undefined) attempt(() => desk.chosen.file(resolve(folder, table), trusted));
  return { files: [...files.values()], problems };
}

/** The files of one entry, so that its fault names its own place in the list. */
function filesAt(study: Study, i: number, folder: string) {
  try {
    return expandFiles([study.events.files[i]!], folder, 'study');
  } catch (error) {
    if (!(error instanceof InputError)) throw error;
    throw new InputError(`events.files[${i}]`, error.what, error.remedy, { cause: error });
  }
}

function saveStudy(desk: Desk, study: StudyInput, from: string, path: string, replace: boolean): SavedStudy {
  const checked = parseStudy(study);
  const full = desk.chosen.mayWrite(path, 'study', replace);
  const folder = dirname(full);
  const rebased = rebase(study, from, folder);
  writeWhole(full, `${JSON.stringify(rebased, null, 2)}\n`);
  desk.keepsakes.remember(full, checked.title, Date.now());
  desk.keepsakes.dropDraft();
  return { path: full, folder, study: rebased };
}

/** The study with its relative paths made relative to another folder. Absolute paths stay what they are. */
export function rebase(study: StudyInput, from: string, to: string): StudyInput {
  if (resolve(from) === resolve(to)) return study;
  const moved = (path: string): string => (isAbsolute(path) ? path : relativeName(resolve(from, path), to));
  const { reference } = study;
  return {
    ...study,
    events: { ...study.events, files: study.events.files.map(moved) },
    ...(reference?.file !== undefined && { reference: { ...reference, file: moved(reference.file) } }),
  };
}

function relativeName(path: string, folder: string): string {
  const near = relative(resolve(folder), path);
  return (isAbsolute(near) ? path : near).split(sep).join('/');
}
