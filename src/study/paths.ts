import { existsSync, statSync } from 'node:fs';
import { basename, dirname, isAbsolute, join, relative, resolve, sep } from 'node:path';
import { globSync, isDynamicPattern } from 'tinyglobby';
import { InputError } from './input-error';

/** An event file as a study names it: its path on disk, and the path relative to the study's folder, with `/`. */
export interface NamedFile {
  path: string;
  name: string;
}

/**
 * The files that a study's paths and globs name, relative to `folder`, sorted by name and each once.
 * A name that is a file is taken literally, even if it reads like a glob. Throws `InputError` where a path or glob
 * names nothing.
 */
export function expandFiles(
  patterns: readonly string[],
  folder: string,
  where: string,
  key = 'events.files',
): NamedFile[] {
  const found = new Map<string, NamedFile>();
  patterns.forEach((pattern, i) => {
    const at = `${where}: ${key}[${i}]`;
    for (const path of filesOf(pattern, folder, at)) {
      const name = nameOf(path, folder);
      found.set(path, { path, name });
    }
  });
  return [...found.values()].sort((a, b) => (a.name < b.name ? -1 : a.name > b.name ? 1 : 0));
}

function filesOf(pattern: string, folder: string, at: string): string[] {
  const literal = resolve(folder, pattern);
  if (existsSync(literal)) {
    if (statSync(literal).isDirectory()) {
      throw new InputError(at, `"${pattern}" is a folder`, 'name the files in it, for instance with /*.csv');
    }
    return [literal];
  }
  if (!isDynamicPattern(pattern)) throw new InputError(at, `no file "${pattern}"`, `look for it beside ${folder}`);
  const paths = globSync(pattern.split(sep).join('/'), {
    cwd: folder,
    absolute: true,
    expandDirectories: false,
    dot: false,
  });
  if (paths.length === 0) throw new InputError(at, `no file matches "${pattern}"`, `look for it beside ${folder}`);
  return paths.map((path) => resolve(path));
}

function nameOf(path: string, folder: string): string {
  const near = relative(folder, path);
  return (isAbsolute(near) ? path : near).split(sep).join('/');
}

/** The folder a bundle goes to when none is named: the study's name beside it. */
export function defaultBundleFolder(studyPath: string): string {
  const base = basename(studyPath).replace(/\.study\.json$|\.json$/i, '');
  return join(dirname(resolve(studyPath)), `${base}.bundle`);
}
