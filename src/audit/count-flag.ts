import type { Flag, FlagId } from './flag';

/** The answer for a number that is known exactly: it is compared and has no interval and no probability. */
export interface CountLimit {
  id: FlagId;
  /** `null` for the list as a whole. */
  column: string | null;
  value: number;
  limit: number;
  isBeyond: boolean;
  evidence: string;
  /** What to do where it is beyond. */
  remedy: string;
}

export function countFlag({ id, column, value, limit, isBeyond, evidence, remedy }: CountLimit): Flag {
  const none = { bin: null, lower: null, upper: null, probability: null };
  const state = isBeyond ? 'flagged' : 'clear';
  return { id, column, value, limit, state, ...none, evidence, advice: isBeyond ? remedy : '' };
}
