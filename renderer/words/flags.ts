import type { Flag, FlagId } from '../../src/audit/flag';
import type { Limits } from '../../src/study/study';
import type { Axes } from '../bench/axes';
import { bandTitle, outcomeTitle } from './places';

export interface FlagWords {
  title: string;
  /** What a flagged place has, in half a sentence. */
  says: string;
  limit: keyof Limits | null;
}

export const FLAGS: Record<FlagId, FlagWords> = {
  empty: { title: 'Empty', says: 'no event in the column', limit: null },
  thin: { title: 'Thin', says: 'too few effective entries', limit: 'thin' },
  'prior-led': { title: 'Led by the prior', says: 'the prior weighs too much', limit: 'prior-led' },
  lossy: { title: 'Lossy', says: 'efficiency below the limit', limit: 'lossy' },
  'spill-below': { title: 'Spill below', says: 'too much below the window', limit: 'spill-below' },
  'spill-above': { title: 'Spill above', says: 'too much above the window', limit: 'spill-above' },
  'feed-in': { title: 'Feed-in', says: 'too much from outside the true window', limit: 'feed-in' },
  unstable: { title: 'Unstable', says: 'too little stays in its bin', limit: 'unstable' },
  impure: { title: 'Impure', says: 'too much comes from other columns', limit: 'impure' },
  'non-monotone': { title: 'Not monotone', says: 'reconstructed lower than the column before', limit: null },
  'slope-bias': { title: 'Slope bias', says: 'depends on the spectrum inside the bin', limit: 'slope-bias' },
  'run-drift': { title: 'Run drift', says: 'runs differ', limit: 'run-drift-distance' },
  'single-event': { title: 'Single event', says: 'one event carries too much weight', limit: 'single-event' },
  'negative-weight': { title: 'Negative weight', says: 'a cell has no positive weight', limit: null },
  duplicate: { title: 'Duplicates', says: 'event identities repeat', limit: null },
  'ill-conditioned': { title: 'Ill-conditioned', says: 'cannot be inverted fully', limit: null },
  'matrix-limited': {
    title: 'Limited by the matrix',
    says: 'calibration statistics outweigh the data’s',
    limit: 'matrix-limited',
  },
};

/** The place of a flag in words. */
export function flagPlace(
  flag: Flag,
  axes: Axes,
  columnNames: readonly string[],
  outcomeNames: readonly string[],
): string {
  if (flag.column !== null) {
    const column = columnNames.indexOf(flag.column);
    return column < 0 ? flag.column : bandTitle(axes.true, column);
  }
  if (flag.bin !== null) {
    const outcome = outcomeNames.indexOf(flag.bin);
    return outcome < 0 ? flag.bin : outcomeTitle(axes.reconstructed, outcome);
  }
  return flag.id === 'duplicate' ? 'event list' : 'whole matrix';
}
