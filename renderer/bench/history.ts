/** The past, present and future of a document that is replaced, never changed in place. */
export interface History<T> {
  past: readonly T[];
  present: T;
  future: readonly T[];
  /** The edit the present came from: further steps of the same edit replace it, so that one drag is one undo. */
  edit: string | null;
}

/** Steps kept; older ones are forgotten. */
export const MOST_STEPS = 500;

export function begin<T>(present: T): History<T> {
  return { past: [], present, future: [], edit: null };
}

/** The history after `next` became the present. With the `edit` of the step before, both are one step. */
export function record<T>(history: History<T>, next: T, edit: string | null = null): History<T> {
  if (same(next, history.present)) return history;
  if (edit !== null && edit === history.edit) return { ...history, present: next, future: [] };
  return { past: [...history.past, history.present].slice(-MOST_STEPS), present: next, future: [], edit };
}

/** Ends a joined edit: the next step is a step of its own. */
export function settle<T>(history: History<T>): History<T> {
  return history.edit === null ? history : { ...history, edit: null };
}

export function undo<T>(history: History<T>): History<T> {
  const previous = history.past.at(-1);
  if (previous === undefined) return history;
  return {
    past: history.past.slice(0, -1),
    present: previous,
    future: [history.present, ...history.future],
    edit: null,
  };
}

export function redo<T>(history: History<T>): History<T> {
  const [next, ...future] = history.future;
  if (next === undefined) return history;
  return { past: [...history.past, history.present], present: next, future, edit: null };
}

/** Whether two plain documents say the same. */
export function same(a: unknown, b: unknown): boolean {
  return a === b || JSON.stringify(a) === JSON.stringify(b);
}
