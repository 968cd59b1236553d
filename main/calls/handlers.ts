import type { CallName, Checked, Notice, Result } from '../bridge';
import type { Chosen } from '../session/chosen';
import type { Jobs } from '../session/jobs';
import type { Keepsakes } from '../session/keepsakes';
import type { Lease } from '../session/lease';
import type { MatrixThread } from '../session/matrix-thread';
import type { StudyEvents } from '../session/study-events';
import type { InspectCalls } from '../workers/inspect-task';

/** A function for each of some calls, with the checked argument in and the result out. */
export type Handlers<Name extends CallName> = {
  [N in Name]: (argument: Checked<N>) => Result<N> | Promise<Result<N>>;
};

/** Native dialogs and the frame of the window, where there is one: the desktop gives them. */
export interface Desktop {
  dialog(argument: Checked<'dialog'>): Promise<string[] | null>;
  reveal(path: string): void;
  setTitle(title: string, edited: boolean): void;
  /** Prints an HTML file to a PDF file. */
  print(html: string, pdf: string, signal?: AbortSignal): Promise<void>;
}

/** The built worker files; see `windowFilesBeside`. */
export interface WorkerFiles {
  read: URL;
  draw: URL;
  matrix: URL;
  inspect: URL;
}

/** What the calls of one window share. */
export interface Desk {
  transport: 'desktop' | 'loopback';
  version: string;
  /** Folder that a new study's paths are relative to. */
  folder: string;
  demonstration: string | null;
  open: string | null;
  workerFiles: WorkerFiles;
  /** Worker threads a job may use. */
  workers: number;
  chosen: Chosen;
  jobs: Jobs;
  keepsakes: Keepsakes;
  events: StudyEvents;
  matrix: MatrixThread;
  /** Audits take seconds and rehearsals minutes: each has a thread of its own, so that a chosen cell never waits for them. */
  audits: MatrixThread;
  long: MatrixThread;
  inspectors: Lease<InspectCalls>;
  desktop: Desktop | null;
  now: () => number;
  tell: (notice: Notice) => void;
}
