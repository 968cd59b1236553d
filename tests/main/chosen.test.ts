import { mkdirSync, mkdtempSync, rmSync, writeFileSync } from 'node:fs';
import { tmpdir } from 'node:os';
import { join } from 'node:path';
import { afterAll, beforeAll, beforeEach, describe, expect, it } from 'vitest';
import { Chosen, isHidden } from '../../main/session/chosen';
import { listFolder } from '../../main/session/list-folder';
import { Refused } from '../../main/session/refusal';

let folder: string;
let chosen: Chosen;
const at = (...parts: string[]) => join(folder, ...parts);

beforeAll(() => {
  folder = mkdtempSync(join(tmpdir(), 'entasis-chosen-'));
  for (const name of ['run 1.csv', 'run 10.csv', 'run 2.csv.gz', 'a.study.json', 'notes.md', '.hidden.csv']) {
    writeFileSync(at(name), 'x');
  }
  for (const name of ['old.bundle', 'plain', '.ssh']) mkdirSync(at(name));
  writeFileSync(at('old.bundle', 'manifest.json'), '{}');
  writeFileSync(at('.ssh', 'id.csv'), 'x');
});
afterAll(() => rmSync(folder, { recursive: true, force: true }));
beforeEach(() => (chosen = new Chosen()));

describe('reading', () => {
  it('is allowed of what was chosen, and of nothing else', () => {
    expect(() => chosen.mayRead(at('run 1.csv'))).toThrow(Refused);
    chosen.file(at('run 1.csv'));
    expect(chosen.mayRead(at('plain', '..', 'run 1.csv'))).toBe(at('run 1.csv'));
    expect(() => chosen.mayRead(at('run 10.csv'))).toThrow('not chosen');
  });

  it('cannot be of hidden files, what is in hidden folders, or the system', () => {
    for (const path of [
      at('.hidden.csv'),
      at('.ssh', 'id.csv'),
      '/proc/self/environ',
      '/dev/zero',
      '/sys/kernel/notes',
    ]) {
      expect(() => chosen.file(path), path).toThrow('hidden');
    }
    expect(isHidden('/home/a/.config/x')).toBe(true);
    expect(isHidden('/home/a/b.c/..d')).toBe(true);
    expect(isHidden('/home/a/b.c/d')).toBe(false);
    expect(isHidden('/device/x')).toBe(false);
  });

  it('may be of a hidden file that was named outside the page', () => {
    expect(chosen.file(at('.hidden.csv'), true)).toBe(at('.hidden.csv'));
  });

  it('is refused for folders, missing files and paths that are none', () => {
    for (const path of [at('plain'), at('none.csv'), 'run 1.csv', '', `${at('run 1.csv')}\0.png`]) {
      expect(() => chosen.file(path), path).toThrow(Refused);
    }
  });

  it('of a bundle needs a manifest in it', () => {
    expect(() => chosen.bundle(at('plain'))).toThrow('manifest.json');
    chosen.bundle(at('old.bundle'));
    expect(chosen.mayReadBundle(at('old.bundle'))).toBe(at('old.bundle'));
    expect(() => chosen.mayReadBundle(at('plain'))).toThrow('not chosen');
  });
});

describe('writing', () => {
  it('is allowed at the place chosen, for the kind it was chosen for', () => {
    expect(() => chosen.mayWrite(at('new.png'), 'figure', false)).toThrow('not chosen');
    expect(chosen.place(at('new.png'), 'figure')).toStrictEqual({ path: at('new.png'), exists: false });
    expect(chosen.mayWrite(at('new.png'), 'figure', false)).toBe(at('new.png'));
    expect(() => chosen.mayWrite(at('new.png'), 'text', false)).toThrow('not chosen');
  });

  it('replaces what stands there only where the call says so', () => {
    expect(chosen.place(at('a.study.json'), 'study').exists).toBe(true);
    expect(() => chosen.mayWrite(at('a.study.json'), 'study', false)).toThrow('stands there already');
    expect(chosen.mayWrite(at('a.study.json'), 'study', true)).toBe(at('a.study.json'));
  });

  it('never replaces a folder that is no bundle, or a folder by a file', () => {
    expect(() => chosen.place(at('plain'), 'bundle')).toThrow('other than a bundle');
    expect(() => chosen.place(at('run 1.csv'), 'bundle')).toThrow('other than a bundle');
    expect(chosen.place(at('old.bundle'), 'bundle').exists).toBe(true);
    mkdirSync(at('folder.csv'));
    expect(() => chosen.place(at('folder.csv'), 'text')).toThrow('a folder stands there');
    rmSync(at('folder.csv'), { recursive: true });
  });

  it('looks again when it comes to writing', () => {
    chosen.place(at('later.bundle'), 'bundle');
    mkdirSync(at('later.bundle'));
    expect(() => chosen.mayWrite(at('later.bundle'), 'bundle', true)).toThrow('other than a bundle');
    rmSync(at('later.bundle'), { recursive: true });
  });

  it('gives files only the endings of their kind: no script, no profile', () => {
    for (const name of ['run.sh', 'profile', 'x.png.exe', 'a.desktop', 'x.json']) {
      expect(() => chosen.place(at(name), 'figure'), name).toThrow('ending');
    }
    expect(() => chosen.place(at('x.txt'), 'study')).toThrow('ending');
    expect(() => chosen.place(at('.bashrc'), 'study')).toThrow('hidden');
  });

  it('needs a folder that is there', () => {
    expect(() => chosen.place(at('none', 'x.csv'), 'text')).toThrow('no such folder');
  });
});

describe('a folder in the chooser', () => {
  it('shows folders, bundles and files in the order of people, and nothing hidden', () => {
    const { entries, parent } = listFolder(folder, []);
    expect(parent).toBe(tmpdir());
    expect(entries.map(({ name, kind, looksLike }) => [name, kind, looksLike])).toStrictEqual([
      ['old.bundle', 'bundle', 'other'],
      ['plain', 'folder', 'other'],
      ['a.study.json', 'file', 'study'],
      ['notes.md', 'file', 'other'],
      ['run 1.csv', 'file', 'events'],
      ['run 2.csv.gz', 'file', 'events'],
      ['run 10.csv', 'file', 'events'],
    ]);
  });

  it('is refused where it is hidden, a file or not there', () => {
    for (const path of [at('.ssh'), at('run 1.csv'), at('none')]) expect(() => listFolder(path, [])).toThrow(Refused);
  });
});
