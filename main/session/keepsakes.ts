import { randomUUID } from 'node:crypto';
import { existsSync, mkdirSync, readdirSync, readFileSync, renameSync, rmSync, writeFileSync } from 'node:fs';
import { homedir } from 'node:os';
import { join } from 'node:path';
import { z } from '../../src/study/zod';
import type { StudyInput } from '../../src/study/study';
import type { Draft, RecentStudy } from '../bridge';

/** Studies remembered; more would not be a list of recent ones. */
const MOST_RECENT = 12;

const recentSchema = z.array(z.object({ path: z.string(), title: z.string(), opened: z.number() }));
const draftSchema = z.object({
  path: z.string().nullable(),
  folder: z.string(),
  study: z.custom<StudyInput>((value) => typeof value === 'object' && value !== null && !Array.isArray(value)),
  saved: z.number(),
});

/** Where each system keeps what a program remembers between starts. */
export function keepsakesFolder(): string {
  if (process.platform === 'win32')
    return join(process.env.APPDATA ?? join(homedir(), 'AppData', 'Roaming'), 'Entasis');
  if (process.platform === 'darwin') return join(homedir(), 'Library', 'Application Support', 'Entasis');
  return join(process.env.XDG_STATE_HOME ?? join(homedir(), '.local', 'state'), 'entasis');
}

/**
 * Recent studies and drafts, in one folder. A draft is named after the process that wrote it: one whose process runs
 * is another window's, any other was left behind. Whatever cannot be read is as if it were not there.
 */
export class Keepsakes {
  private readonly own = `draft-${process.pid}-${randomUUID()}.json`;
  /** The draft that was offered at the start, dropped together with the own one. */
  private offered: string | null = null;

  constructor(private readonly folder: string) {}

  recent(): RecentStudy[] {
    const list = recentSchema.safeParse(this.read('recent.json'));
    return (list.data ?? []).map((study) => ({ ...study, there: existsSync(study.path) }));
  }

  /** Puts a study at the head of the list. */
  remember(path: string, title: string, opened: number): void {
    const others = this.recent().filter((study) => study.path !== path);
    const list = [{ path, title, opened }, ...others.map(({ there: _, ...study }) => study)];
    this.write('recent.json', list.slice(0, MOST_RECENT));
  }

  forget(path: string): RecentStudy[] {
    const rest = this.recent().filter((study) => study.path !== path);
    this.write(
      'recent.json',
      rest.map(({ there: _, ...study }) => study),
    );
    return rest;
  }

  keepDraft(draft: Draft): void {
    this.write(this.own, draft);
  }

  dropDraft(): void {
    for (const name of [this.own, this.offered]) if (name !== null) rmSync(join(this.folder, name), { force: true });
    this.offered = null;
  }

  /**
   * The draft of this very window, whose page was loaded again, else the newest that no running window owns; `null` where
   * there is none. Older ones are cleared away.
   */
  draftLeftBehind(): Draft | null {
    const own = draftSchema.safeParse(this.read(this.own));
    if (own.success) return own.data;
    const left = this.names().filter((name) => isLeftBehind(name));
    const drafts = left.flatMap((name) => {
      const draft = draftSchema.safeParse(this.read(name));
      return draft.success ? [{ name, draft: draft.data }] : [];
    });
    const newest = drafts.sort((a, b) => b.draft.saved - a.draft.saved)[0];
    for (const name of left) if (name !== newest?.name) rmSync(join(this.folder, name), { force: true });
    this.offered = newest?.name ?? null;
    return newest?.draft ?? null;
  }

  private names(): string[] {
    return existsSync(this.folder) ? readdirSync(this.folder) : [];
  }

  private read(name: string): unknown {
    try {
      return JSON.parse(readFileSync(join(this.folder, name), 'utf8'));
    } catch {
      return undefined;
    }
  }

  private write(name: string, value: unknown): void {
    mkdirSync(this.folder, { recursive: true });
    const path = join(this.folder, name);
    const whole = `${path}.${randomUUID()}.part`;
    writeFileSync(whole, JSON.stringify(value));
    renameSync(whole, path);
  }
}

function isLeftBehind(name: string): boolean {
  const pid = /^draft-(\d+)-[0-9a-f-]+\.json$/.exec(name)?.[1];
  return pid !== undefined && !isRunning(Number(pid));
}

function isRunning(pid: number): boolean {
  try {
    process.kill(pid, 0);
    return true;
  } catch (error) {
    // A process of another user runs too, it only may not be asked.
    return (error as NodeJS.ErrnoException).code === 'EPERM';
  }
}
