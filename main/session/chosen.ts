import { existsSync, statSync } from 'node:fs';
import { isAbsolute, parse, relative, resolve, sep } from 'node:path';
import type { PlaceKind } from '../bridge';
import { Refused } from './refusal';

/** Endings a file of each kind may have; a bundle is a folder. A page can never be made to write a script or a profile. */
const ENDINGS: Record<PlaceKind, RegExp> = {
  study: /\.json$/i,
  bundle: /(^|[^.])$/,
  figure: /\.(png|svg)$/i,
  text: /\.(csv|tsv|txt)$/i,
  report: /\.(html|pdf)$/i,
  converted: /\.(npz|h5|hdf5|parquet|arrow|csv|json|rmf|fits|rsp)$/i,
};
const EXAMPLES: Record<PlaceKind, string> = {
  study: '.study.json',
  bundle: '.bundle',
  figure: '.png or .svg',
  text: '.csv',
  report: '.html or .pdf',
  converted: '.npz, .h5, .parquet, .arrow, .csv, .json, .rmf or .fits',
};
/** Folders of the system that hold no files of a user. */
const SYSTEM_FOLDERS = ['/proc', '/sys', '/dev'];

/** What the user chose in this window: files that may be read, bundles, and places that may be written. */
export class Chosen {
  private readonly files = new Set<string>();
  private readonly bundles = new Set<string>();
  private readonly places = new Map<string, PlaceKind>();

  /**
   * Takes a file as chosen. Throws `Refused` for what is missing or no plain file, and for what is hidden unless it is
   * `trusted`: named on the command line or in a dialog of the system, or by a study that was.
   */
  file(path: string, trusted = false): string {
    const full = checked(path, trusted);
    if (!statSync(full, { throwIfNoEntry: false })?.isFile()) throw refusedFile(path, 'no such file');
    this.files.add(full);
    return full;
  }

  bundle(path: string, trusted = false): string {
    const full = checked(path, trusted);
    if (!isBundle(full))
      throw refusedFile(path, 'not a bundle: it has no manifest.json', 'choose the folder of a bundle');
    this.bundles.add(full);
    return full;
  }

  /** Takes a place as chosen for writing something of `kind`; tells whether something stands there already. */
  place(path: string, kind: PlaceKind, trusted = false): { path: string; exists: boolean } {
    const full = checked(path, trusted);
    if (!ENDINGS[kind].test(full))
      throw refusedFile(path, `a ${kind} cannot have that ending`, `end it with ${EXAMPLES[kind]}`);
    const folder = resolve(full, '..');
    if (!statSync(folder, { throwIfNoEntry: false })?.isDirectory())
      throw refusedFile(folder, 'no such folder', 'make it first');
    const exists = existsSync(full);
    if (exists) checkReplaceable(full, kind);
    this.places.set(full, kind);
    return { path: full, exists };
  }

  /** The full path of a file that was chosen. Throws `Refused` for any other. */
  mayRead(path: string): string {
    const full = resolve(path);
    if (this.files.has(full)) return full;
    throw refusedFile(path, 'not chosen in this window', 'choose the file first');
  }

  mayReadBundle(path: string): string {
    const full = resolve(path);
    if (this.bundles.has(full)) return full;
    throw refusedFile(path, 'not chosen in this window', 'choose the bundle first');
  }

  isPlace(path: string, kind: PlaceKind): boolean {
    return this.places.get(resolve(path)) === kind;
  }

  /** The full path of a place chosen for `kind`. What stands there is replaced only where the call says so. */
  mayWrite(path: string, kind: PlaceKind, replace: boolean): string {
    const full = resolve(path);
    if (!this.isPlace(path, kind)) throw refusedFile(path, 'not chosen in this window', 'choose the place first');
    if (existsSync(full)) {
      if (!replace)
        throw new Refused('refused', path, 'something stands there already', 'confirm that it is to be replaced');
      checkReplaceable(full, kind);
    }
    return full;
  }
}

/** A folder is replaced only where it is a bundle, a file only where it is a file. */
function checkReplaceable(full: string, kind: PlaceKind): void {
  if (kind === 'bundle') {
    if (!isBundle(full)) throw refusedFile(full, 'something other than a bundle stands there', 'choose another name');
  } else if (!statSync(full).isFile()) throw refusedFile(full, 'a folder stands there', 'choose another name');
}

export function isBundle(path: string): boolean {
  const isFolder = statSync(path, { throwIfNoEntry: false })?.isDirectory() === true;
  return isFolder && statSync(resolve(path, 'manifest.json'), { throwIfNoEntry: false })?.isFile() === true;
}

/** True for a path with a hidden part (`.ssh`, `.profile`), or inside the system's own folders. */
export function isHidden(full: string): boolean {
  const parts = relative(parse(full).root, full).split(sep);
  const inside = (folder: string): boolean => full === folder || full.startsWith(folder + sep);
  return parts.some((part) => part.startsWith('.')) || SYSTEM_FOLDERS.some(inside);
}

function checked(path: string, trusted: boolean): string {
  if (path.includes('\0')) throw refusedFile(path, 'not a path');
  if (!isAbsolute(path)) throw refusedFile(path, 'not a full path', 'give the path from the top');
  const full = resolve(path);
  if (!trusted && isHidden(full))
    throw refusedFile(
      path,
      'hidden files and system folders cannot be chosen here',
      'move it, or name it on the command line',
    );
  return full;
}

function refusedFile(path: string, what: string, remedy = 'choose another one'): Refused {
  return new Refused('refused', path, what, remedy);
}
