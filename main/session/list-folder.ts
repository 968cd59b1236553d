import { readdirSync, statSync, existsSync } from 'node:fs';
import { homedir } from 'node:os';
import { dirname, join, resolve } from 'node:path';
import type { FolderEntry, FolderListing } from '../bridge';
import { isBundle, isHidden } from './chosen';
import { Refused } from './refusal';

/** Names of event files in the formats that are read; a compressed one keeps its inner ending. */
const EVENTS =
  /\.(csv|tsv|txt|dat|ndjson|jsonl|parquet|pq|h5|hdf5|hdf|arrow|arrows|feather|ipc|npy|npz|fits|fit)(\.(gz|zst))?$/i;
const STUDY = /\.study\.json$/i;
const COLLATOR = new Intl.Collator('en', { numeric: true, sensitivity: 'base' });

/** Entries of a folder for the file chooser of the frame, without hidden ones. Throws `Refused` for no folder. */
export function listFolder(path: string, places: FolderListing['places']): FolderListing {
  const full = resolve(path);
  if (isHidden(full)) throw new Refused('refused', path, 'hidden folders are not shown here', 'choose another folder');
  if (!statSync(full, { throwIfNoEntry: false })?.isDirectory()) {
    throw new Refused('input', path, 'no such folder', 'choose another one');
  }
  const entries = readdirSync(full).flatMap((name) => entryOf(full, name));
  const parent = dirname(full);
  return { path: full, parent: parent === full ? null : parent, places, entries: entries.sort(byKindAndName) };
}

/** The kind of content that a file's name promises. */
export function looksLike(name: string): FolderEntry['looksLike'] {
  if (STUDY.test(name)) return 'study';
  return EVENTS.test(name) ? 'events' : 'other';
}

/** Home, and where the system keeps its disks. */
export function knownPlaces(): FolderListing['places'] {
  const places = [{ label: 'Home', path: homedir() }];
  if (process.platform !== 'win32') return [...places, { label: 'Computer', path: '/' }];
  const letters = [...'CDEFGHIJKLMNOPQRSTUVWXYZ'].map((letter) => `${letter}:\\`);
  return [...places, ...letters.filter((disk) => existsSync(disk)).map((path) => ({ label: path, path }))];
}

function entryOf(folder: string, name: string): FolderEntry[] {
  const path = join(folder, name);
  // A link to nowhere, or what may not be looked at, is left out.
  const facts = isHidden(path) ? undefined : statOrNothing(path);
  if (!facts || !(facts.isDirectory() || facts.isFile())) return [];
  const kind = facts.isFile() ? 'file' : isBundle(path) ? 'bundle' : 'folder';
  const bytes = facts.isFile() ? facts.size : null;
  return [{ name, path, kind, bytes, modified: facts.mtimeMs, looksLike: kind === 'file' ? looksLike(name) : 'other' }];
}

function statOrNothing(path: string) {
  try {
    return statSync(path, { throwIfNoEntry: false });
  } catch {
    return undefined;
  }
}

function byKindAndName(a: FolderEntry, b: FolderEntry): number {
  const rank = (entry: FolderEntry): number => (entry.kind === 'file' ? 1 : 0);
  return rank(a) - rank(b) || COLLATOR.compare(a.name, b.name);
}
