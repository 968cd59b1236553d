import { homedir } from 'node:os';
import { dirname, join, resolve } from 'node:path';
import { readdirSync, renameSync, rmSync, statSync, writeFileSync } from 'node:fs';
import { createHash, randomUUID } from 'node:crypto';
import { InputError } from '../../src/study/input-error';
import { expandFiles, type NamedFile } from '../../src/study/paths';
import type { ChosenFile, ChosenFiles, FolderListing, PlaceKind, Refusal } from '../bridge';
import { isHidden } from '../session/chosen';
import { knownPlaces, listFolder, looksLike } from '../session/list-folder';
import { Refused, refusalOf } from '../session/refusal';
import type { Desk, Handlers } from './handlers';

/** Choosing files and places, and writing what the page made. */
export function fileCalls(
  desk: Desk,
): Handlers<'listFolder' | 'dialog' | 'chooseEvents' | 'choosePlace' | 'chooseBundle' | 'reveal' | 'saveFile'> {
  const { chosen } = desk;
  return {
    listFolder: ({ path }) => listFolder(path ?? startingFolder(desk), placesOf(desk)),
    dialog: (argument) => dialog(desk, argument),
    chooseEvents: ({ patterns, folder }) => chooseEvents(desk, patterns, folder),
    choosePlace: ({ path, kind }) => chosen.place(path, kind),
    chooseBundle: ({ path }) => ({ path: chosen.bundle(path) }),
    reveal: ({ path }) => reveal(desk, path),
    saveFile({ path, data, replace }) {
      const began = desk.now();
      const full = mayWriteAny(desk, path, replace);
      writeWhole(full, data);
      const sha256 = createHash('sha256').update(data).digest('hex');
      return { files: [{ path: full, bytes: data.byteLength, sha256 }], seconds: (desk.now() - began) / 1000 };
    },
  };
}

function startingFolder(desk: Desk): string {
  return isHidden(desk.folder) ? homedir() : desk.folder;
}

function placesOf(desk: Desk): FolderListing['places'] {
  const known = knownPlaces();
  const start = startingFolder(desk);
  return known.some(({ path }) => path === start) ? known : [{ label: 'Starting folder', path: start }, ...known];
}

async function dialog(
  { desktop, chosen }: Desk,
  argument: Parameters<Handlers<'dialog'>['dialog']>[0],
): Promise<{ paths: string[] } | null> {
  if (!desktop) throw new Refused('unavailable', 'dialog', 'this window has no native dialogs', 'choose in the frame');
  const paths = await desktop.dialog(argument);
  if (!paths) return null;
  for (const path of paths) {
    if (argument.for === 'save') chosen.place(path, argument.place ?? 'text', true);
    else if (argument.for === 'bundle') chosen.bundle(path, true);
    else chosen.file(path, true);
  }
  return { paths };
}

/** Chooses every file that the patterns name; what cannot be chosen is told beside, not thrown. */
function chooseEvents(desk: Desk, patterns: readonly string[], folder: string): ChosenFiles {
  const files = new Map<string, ChosenFile>();
  const problems: Refusal[] = [];
  for (const pattern of patterns) {
    try {
      for (const file of filesOf(pattern, folder)) files.set(file.path, chooseFile(desk, file));
    } catch (error) {
      problems.push(refusalOf(error));
    }
  }
  return { files: [...files.values()], problems };
}

/** Chooses the file and tells what is known of it without reading it. */
export function chooseFile(desk: Desk, { path, name }: NamedFile, trusted = false): ChosenFile {
  const full = desk.chosen.file(path, trusted);
  const { size, mtimeMs } = statSync(full);
  return { path: full, name, bytes: size, modified: mtimeMs };
}

/** A folder stands for the event files in it; anything else is a path or a glob as in a study. */
function filesOf(pattern: string, folder: string): NamedFile[] {
  const full = resolve(folder, pattern);
  if (!statSync(full, { throwIfNoEntry: false })?.isDirectory()) return expandFiles([pattern], folder, pattern);
  const isEvents = (name: string): boolean => looksLike(name) === 'events' && statSync(join(full, name)).isFile();
  const names = readdirSync(full).filter(isEvents);
  if (names.length === 0) throw new InputError(pattern, 'no event file in this folder', 'choose the files themselves');
  return names.flatMap((name) => expandFiles([join(full, name)], folder, pattern));
}

function reveal({ desktop }: Desk, path: string): boolean {
  if (!desktop) throw new Refused('unavailable', 'reveal', 'this window cannot open a file manager', 'copy the path');
  desktop.reveal(dirname(resolve(path)) === path ? path : resolve(path));
  return true;
}

/** What a page makes is a figure, a table or a report; the place was chosen as one of these. */
function mayWriteAny({ chosen }: Desk, path: string, replace: boolean): string {
  const kinds: PlaceKind[] = ['figure', 'text'];
  const kind = kinds.find((candidate) => chosen.isPlace(path, candidate));
  return chosen.mayWrite(path, kind ?? 'figure', replace);
}

/** Writes a file beside its place and renames it when it is whole. */
export function writeWhole(path: string, data: Uint8Array | string): void {
  const part = `${path}.${randomUUID()}.part`;
  try {
    writeFileSync(part, data);
    renameSync(part, path);
  } catch (error) {
    rmSync(part, { force: true });
    throw error;
  }
}
