import type { Bridge, PlaceKind, Refusal } from '../../main/bridge';

/** What is to be chosen in the frame. */
export interface Request {
  purpose: 'events' | 'study' | 'bundle' | 'save';
  title: string;
  /** On the button: "Open", "Save". */
  verb: string;
  /** What kind of thing is saved. */
  place?: PlaceKind;
  /** Name of the file or folder to be written, or the folder to begin in. */
  suggested?: string;
  folder?: string;
}

export interface Choosing extends Request {
  done: (paths: string[] | null) => void;
}

/** A place to write to that the user chose; `replace` says that what stands there may go. */
export interface Place {
  path: string;
  replace: boolean;
}

/** Asks for files, and for places to write to, in the frame instead of a dialog. */
export class Chooser {
  now = $state.raw<Choosing | null>(null);
  refusal = $state.raw<Refusal | null>(null);
  /** The folder last looked into. */
  folder = $state<string | null>(null);

  constructor(readonly bridge: Bridge) {}

  /** Resolves with the paths chosen, or `null` where the user left. */
  ask(request: Request): Promise<string[] | null> {
    this.now?.done(null);
    this.refusal = null;
    return new Promise((resolve) => {
      const done = (paths: string[] | null) => {
        this.now = null;
        resolve(paths);
      };
      this.now = { ...request, done };
    });
  }

  leave(): void {
    this.now?.done(null);
  }

  /** Asks for a place to write to, and tells the main side that it was chosen. */
  async place(request: Omit<Request, 'purpose'> & { place: PlaceKind }): Promise<Place | null> {
    const paths = await this.ask({ ...request, purpose: 'save' });
    return paths?.[0] === undefined ? null : { path: paths[0], replace: true };
  }

  /** Writes bytes made in the page (a figure, a table) to a place that is asked for. Answers the path written. */
  async saveBytes(kind: 'figure' | 'text', suggested: string, data: Uint8Array<ArrayBuffer>): Promise<string | null> {
    const place = await this.place({ title: `Save ${suggested}`, verb: 'Save', place: kind, suggested });
    if (!place) return null;
    const answer = await this.bridge.call('saveFile', { ...place, data });
    this.refusal = answer.ok ? null : answer;
    return answer.ok ? place.path : null;
  }
}

/** "figure name, 2" made fit for a file name on any of the three systems. */
export function fileStem(title: string): string {
  const plain = title
    .normalize('NFKD')
    .replace(/[^\w\s-]+/g, '')
    .trim();
  return plain.replace(/[\s_]+/g, '-').toLowerCase() || 'entasis';
}
