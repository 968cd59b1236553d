import { spawnSync } from 'node:child_process';
import { mkdtempSync, readdirSync, rmSync, writeFileSync } from 'node:fs';
import { tmpdir } from 'node:os';
import { join } from 'node:path';
import { afterEach, beforeEach, describe, expect, it } from 'vitest';
import { Keepsakes } from '../../main/session/keepsakes';
import { keepWindowState, readWindowState } from '../../main/electron/window-state';
import type { StudyInput } from '../../src/study/study';

let folder: string;
beforeEach(() => (folder = mkdtempSync(join(tmpdir(), 'entasis-keep-'))));
afterEach(() => rmSync(folder, { recursive: true, force: true }));

const study = { title: 'Kept' } as StudyInput;
const draft = (saved: number) => ({ path: null, folder: '/data', study, saved });

/** A process id that was in use a moment ago and is free now. */
function endedProcess(): number {
  return spawnSync(process.execPath, ['-e', '']).pid;
}

describe('recent studies', () => {
  it('stand newest first, each once, and say whether their file is there', () => {
    const keepsakes = new Keepsakes(folder);
    const there = join(folder, 'here.study.json');
    writeFileSync(there, '{}');
    keepsakes.remember('/gone.study.json', 'Gone', 1);
    keepsakes.remember(there, 'Here', 2);
    keepsakes.remember('/gone.study.json', 'Gone again', 3);
    expect(new Keepsakes(folder).recent()).toStrictEqual([
      { path: '/gone.study.json', title: 'Gone again', opened: 3, there: false },
      { path: there, title: 'Here', opened: 2, there: true },
    ]);
  });

  it('are at most twelve, and can be forgotten', () => {
    const keepsakes = new Keepsakes(folder);
    for (let i = 0; i < 13; i++) keepsakes.remember(`/${i}.study.json`, String(i), i);
    expect(keepsakes.recent().map(({ title }) => Number(title))).toStrictEqual([12, 11, 10, 9, 8, 7, 6, 5, 4, 3, 2, 1]);
    expect(keepsakes.forget('/12.study.json')).toHaveLength(11);
  });

  it('are none where the list is missing or damaged', () => {
    expect(new Keepsakes(join(folder, 'none')).recent()).toStrictEqual([]);
    writeFileSync(join(folder, 'recent.json'), '[{"path": 3}]');
    expect(new Keepsakes(folder).recent()).toStrictEqual([]);
  });
});

describe('a draft', () => {
  it('of a window that ended is offered to the next one, and gone once it is dropped', () => {
    writeFileSync(join(folder, `draft-${endedProcess()}-0a.json`), JSON.stringify(draft(5)));
    const next = new Keepsakes(folder);
    expect(next.draftLeftBehind()).toStrictEqual(draft(5));
    expect(new Keepsakes(folder).draftLeftBehind()).toStrictEqual(draft(5));
    next.dropDraft();
    expect(new Keepsakes(folder).draftLeftBehind()).toBeNull();
  });

  it('of a window that still runs is not offered to another', () => {
    new Keepsakes(folder).keepDraft(draft(1));
    expect(new Keepsakes(folder).draftLeftBehind()).toBeNull();
  });

  it('is offered to its own window when the page is loaded again', () => {
    const keepsakes = new Keepsakes(folder);
    expect(keepsakes.draftLeftBehind()).toBeNull();
    keepsakes.keepDraft(draft(1));
    expect(keepsakes.draftLeftBehind()).toStrictEqual(draft(1));
    keepsakes.dropDraft();
    expect(keepsakes.draftLeftBehind()).toBeNull();
  });

  it('is the newest of several, the others are cleared away', () => {
    const pid = endedProcess();
    for (const saved of [1, 3, 2])
      writeFileSync(join(folder, `draft-${pid}-0${saved}.json`), JSON.stringify(draft(saved)));
    expect(new Keepsakes(folder).draftLeftBehind()?.saved).toBe(3);
    expect(readdirSync(folder)).toHaveLength(1);
  });

  it('that is damaged is as if it were not there', () => {
    writeFileSync(join(folder, `draft-${endedProcess()}-0a.json`), '{"study": 3');
    expect(new Keepsakes(folder).draftLeftBehind()).toBeNull();
  });
});

describe('the place of the desktop window', () => {
  const display = { x: 0, y: 0, width: 1920, height: 1080 };

  it('is kept, and found again while a display shows it', () => {
    const path = join(folder, 'a', 'window.json');
    const state = { x: 100, y: 50, width: 1300, height: 800, maximised: false };
    keepWindowState(path, state);
    expect(readWindowState(path, [display])).toStrictEqual(state);
  });

  it('is left to the system where its display is gone, or nothing is known', () => {
    const path = join(folder, 'window.json');
    expect(readWindowState(path, [display])).toStrictEqual({ width: 1440, height: 900 });
    keepWindowState(path, { x: 3000, y: 50, width: 1300, height: 800, maximised: true });
    expect(readWindowState(path, [display])).toStrictEqual({ width: 1300, height: 800, maximised: true });
    writeFileSync(path, JSON.stringify({ x: 0, y: 0, width: 10, height: 10, maximised: false }));
    expect(readWindowState(path, [display])).toStrictEqual({ width: 1440, height: 900 });
  });
});
