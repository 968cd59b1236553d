import { InputError } from '../../src/study/input-error';
import { parseStudy, STUDY_SCHEMA, type Study } from '../../src/study/study';
import { begin, record, redo, same, settle, undo, type History } from './history';

export interface Fault {
  where: string;
  what: string;
  remedy: string;
}

/** The name that stands for the document itself in faults; it is taken off before a fault is shown. */
const DOCUMENT = 'study';

/** A study before anything is chosen. It lacks files and roles, so it is not valid yet; the stages say what is next. */
export function blankStudy(): Study {
  return {
    schema: STUDY_SCHEMA,
    title: 'Untitled study',
    events: { files: [] },
    roles: { true: '', reconstructed: '' },
    lost: 'missing',
    unmatched: 'reject',
    cuts: [],
    axes: {
      true: { label: '', unit: '', from: 0, to: 1, bins: 20, spacing: 'linear' },
      reconstructed: { label: '', unit: '', from: 0, to: 1, bins: 20, spacing: 'linear' },
    },
    prior: { pseudoCount: 0.5 },
    credibility: 0.95,
    reference: { kind: 'calibration', events: 30_000 },
    limits: DEFAULT_LIMITS,
    ensemble: { replicas: 1000, seed: 1 },
  };
}

/** Taken from the schema itself, through the smallest valid document. */
export const DEFAULT_LIMITS: Study['limits'] = parseStudy({
  schema: STUDY_SCHEMA,
  events: { files: ['-'] },
  roles: { true: 't', reconstructed: 'r' },
  axes: { true: { from: 0, to: 1, bins: 1 }, reconstructed: { from: 0, to: 1, bins: 1 } },
}).limits;

/** The study document with its file, its history and whether it is edited. */
export class StudyFile {
  #history = $state.raw<History<Study>>(begin(blankStudy()));
  #saved = $state.raw<Study>(this.#history.present);
  path = $state<string | null>(null);
  folder = $state('');

  readonly document = $derived(this.#history.present);
  readonly edited = $derived(!same(this.#history.present, this.#saved));
  readonly canUndo = $derived(this.#history.past.length > 0);
  readonly canRedo = $derived(this.#history.future.length > 0);
  /** False in the middle of a drag. */
  readonly settled = $derived(this.#history.edit === null);
  readonly checked: { study: Study; fault: null } | { study: null; fault: Fault } = $derived(check(this.document));

  constructor(folder: string) {
    this.folder = folder;
  }

  /** Replaces the document by what `change` makes of it. Changes with the same `edit` are one step of undo. */
  edit(change: (document: Study) => Study, edit: string | null = null): void {
    this.#history = record(this.#history, change(this.document), edit);
  }

  /** Replaces one part of the document. */
  set<Key extends keyof Study>(key: Key, value: Study[Key], edit: string | null = null): void {
    this.edit((document) => ({ ...document, [key]: value }), edit);
  }

  settle(): void {
    this.#history = settle(this.#history);
  }

  undo(): void {
    this.#history = undo(this.#history);
  }

  redo(): void {
    this.#history = redo(this.#history);
  }

  /** Another study takes the place of this one, with a history of its own. */
  open(study: Study, folder: string, path: string | null, saved = true): void {
    this.#history = begin(study);
    this.#saved = saved ? study : blankStudy();
    this.folder = folder;
    this.path = path;
  }

  /** The document was written: as it now stands in the file, which may have rebased its paths. */
  markSaved(study: Study, folder: string, path: string): void {
    if (!same(study, this.document)) this.#history = { ...record(this.#history, study), edit: null };
    this.#saved = this.document;
    this.folder = folder;
    this.path = path;
  }
}

function check(document: Study): { study: Study; fault: null } | { study: null; fault: Fault } {
  try {
    return { study: parseStudy(document, DOCUMENT), fault: null };
  } catch (error) {
    if (!(error instanceof InputError)) throw error;
    return { study: null, fault: { where: pathOf(error.where), what: error.what, remedy: error.remedy } };
  }
}

function pathOf(where: string): string {
  return where.startsWith(`${DOCUMENT}: `) ? where.slice(DOCUMENT.length + 2) : where;
}

/** The fault, where it lies at this JSON path or inside it; `null` elsewhere. */
export function faultAt(fault: Fault | null, path: string): Fault | null {
  if (!fault) return null;
  const inside = fault.where === path || fault.where.startsWith(`${path}.`) || fault.where.startsWith(`${path}[`);
  return inside ? fault : null;
}
