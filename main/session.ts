import { availableParallelism, homedir } from 'node:os';
import { existsSync } from 'node:fs';
import { dirname, resolve, sep } from 'node:path';
import { oneLine } from '../src/study/input-error';
import { BRIDGE, type Answer, type CallName, type Notice, type Refusal, type StartFacts } from './bridge';
import { auditCalls } from './calls/audit-calls';
import { axisCalls } from './calls/axis-calls';
import { eventCalls } from './calls/event-calls';
import { fileCalls } from './calls/file-calls';
import { handOverCalls } from './calls/hand-over-calls';
import type { Desk, Desktop, Handlers, WorkerFiles } from './calls/handlers';
import { matrixCalls } from './calls/matrix-calls';
import { studyCalls } from './calls/study-calls';
import { Chosen } from './session/chosen';
import { Jobs } from './session/jobs';
import { Keepsakes, keepsakesFolder } from './session/keepsakes';
import { Lease } from './session/lease';
import { MatrixThread } from './session/matrix-thread';
import { refusalOf } from './session/refusal';
import { StudyEvents } from './session/study-events';
import { VERSION } from './version';

/** Bytes of event columns that a window keeps in memory; beyond them files are read again. */
export const KEEP_BUDGET = 2 ** 30;

export interface SessionOptions {
  transport: 'desktop' | 'loopback';
  workerFiles: WorkerFiles;
  /** The demonstration study, where it is installed. */
  demonstration?: string | null;
  /** Study named on the command line. */
  open?: string | null;
  desktop?: Desktop | null;
  workers?: number;
  keep?: number;
  keepsakes?: string;
}

/**
 * One window's session: the bridge's one implementation. Every argument is checked by its schema before a handler sees
 * it, and every fault becomes plain data.
 */
export class Session {
  private readonly desk: Desk;
  private readonly handlers: Handlers<CallName>;
  private readonly listeners = new Set<(notice: Notice) => void>();

  constructor(options: SessionOptions) {
    const tell = (notice: Notice): void => this.listeners.forEach((listener) => listener(notice));
    this.desk = deskOf(options, tell);
    this.handlers = handlersOf(this.desk, options.keep ?? KEEP_BUDGET);
  }

  /** Answers one call. Never rejects. */
  async call(name: string, argument: unknown): Promise<Answer<unknown>> {
    if (!Object.hasOwn(BRIDGE, name)) return unknownCall(name);
    const call = name as CallName;
    const checked = BRIDGE[call].argument.safeParse(argument);
    if (!checked.success) return wrongArgument(call, checked.error.issues[0]!);
    try {
      const handler = this.handlers[call] as (argument: unknown) => unknown;
      return { ok: true, value: await handler(checked.data) };
    } catch (error) {
      const refusal = refusalOf(error);
      if (refusal.code === 'fault' && process.env['ENTASIS_TRACE']) console.error(error);
      return refusal;
    }
  }

  listen(listener: (notice: Notice) => void): () => void {
    this.listeners.add(listener);
    return () => void this.listeners.delete(listener);
  }

  /** Sends the page a command or a study to open, as a menu does. */
  tell(notice: Notice): void {
    this.desk.tell(notice);
  }

  /** Takes a file as chosen that the user dropped on the desktop's window. Answers false where it is no file. */
  drop(path: string): boolean {
    try {
      this.desk.chosen.file(path, true);
      return true;
    } catch {
      return false;
    }
  }

  /** Stops all work and lets go of files and workers. */
  async close(): Promise<void> {
    this.desk.jobs.cancelAll();
    const { events, matrix, audits, long, inspectors } = this.desk;
    await Promise.all([events.close(), matrix.end(), audits.end(), long.end(), inspectors.end()]);
  }
}

function deskOf(options: SessionOptions, tell: (notice: Notice) => void): Desk {
  const { transport, workerFiles, demonstration = null, open = null, desktop = null } = options;
  const workers = options.workers ?? availableParallelism();
  const keep = options.keep ?? KEEP_BUDGET;
  return {
    transport,
    version: VERSION,
    folder: open === null ? process.cwd() : dirname(resolve(open)),
    demonstration: demonstration !== null && existsSync(demonstration) ? resolve(demonstration) : null,
    open: open === null ? null : resolve(open),
    workerFiles,
    workers,
    chosen: new Chosen(),
    jobs: new Jobs(tell),
    keepsakes: new Keepsakes(options.keepsakes ?? keepsakesFolder()),
    events: new StudyEvents({ readWorker: workerFiles.read, workers, keep }),
    matrix: new MatrixThread(workerFiles.matrix),
    audits: new MatrixThread(workerFiles.matrix),
    long: new MatrixThread(workerFiles.matrix),
    inspectors: new Lease(workerFiles.inspect),
    desktop,
    now: () => performance.now(),
    tell,
  };
}

function handlersOf(desk: Desk, keepBudget: number): Handlers<CallName> {
  const own: Handlers<'start' | 'cancel'> = {
    start: () => startFacts(desk, keepBudget),
    cancel: ({ job }) => desk.jobs.cancel(job),
  };
  return {
    ...own,
    ...fileCalls(desk),
    ...studyCalls(desk),
    ...eventCalls(desk),
    ...axisCalls(desk),
    ...matrixCalls(desk),
    ...auditCalls(desk),
    ...handOverCalls(desk),
  };
}

function startFacts(desk: Desk, keepBudget: number): StartFacts {
  const { version, transport, folder, workers, keepsakes, demonstration, open } = desk;
  return {
    version,
    platform: process.platform === 'win32' || process.platform === 'darwin' ? process.platform : 'linux',
    transport,
    home: homedir(),
    folder,
    separator: sep,
    cores: workers,
    keepBudget,
    recent: keepsakes.recent(),
    draft: keepsakes.draftLeftBehind(),
    demonstration,
    open,
  };
}

function unknownCall(name: string): Refusal {
  const where = oneLine(`call ${name}`);
  return { ok: false, code: 'refused', where, what: 'no such call', remedy: 'reload the window' };
}

interface ArgumentIssue {
  path: PropertyKey[];
  message: string;
}

function wrongArgument(name: string, { path, message }: ArgumentIssue): Refusal {
  const where = [name, ...path.map(String)].join('.');
  return { ok: false, code: 'refused', where, what: oneLine(message), remedy: 'correct the value' };
}
