import { InputError } from '../study/input-error';

/** Which replicas leave: indices `[from, to)`, counted from 0 as in the arrays. */
export interface ReplicaRange {
  from: number;
  to: number;
}

/** What every writer of a format takes. */
export interface HandoverOptions {
  /** The file to write; formats of several files put the others beside it. An existing one is replaced. */
  out: string;
  /** All of them when absent. */
  replicas?: ReplicaRange | undefined;
  signal?: AbortSignal | undefined;
  /** Hears how many replicas are written, and of how many. */
  onProgress?: ((done: number, total: number) => void) | undefined;
}

/**
 * Reads `A..B`, the replicas from A to B inclusive, counted from 0; `A` alone is one replica.
 * Throws `InputError` for other text.
 */
export function parseReplicaRange(text: string, where = '--replicas'): ReplicaRange {
  const match = /^(\d+)(?:\.\.(\d+))?$/.exec(text.trim());
  const from = Number(match?.[1]);
  const last = Number(match?.[2] ?? match?.[1]);
  if (!match || !(last >= from) || !Number.isSafeInteger(last)) {
    throw new InputError(where, `"${text}" is no range of replicas`, 'give it as A..B with A <= B, counted from 0');
  }
  return { from, to: last + 1 };
}

/** The replicas asked for, or all `available` ones. Throws `InputError` where there are not so many. */
export function resolveRange(asked: ReplicaRange | undefined, available: number, where: string): ReplicaRange {
  const range = asked ?? { from: 0, to: available };
  if (range.from < 0 || range.to < range.from || range.to > available) {
    const wanted = `replicas ${range.from} to ${range.to - 1}`;
    const there = available === 0 ? 'none' : `0 to ${available - 1}`;
    throw new InputError(where, `${wanted} asked for, it holds ${there}`, 'ask for replicas that are there');
  }
  return range;
}
