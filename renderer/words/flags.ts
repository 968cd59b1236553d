import type { Flag, FlagId } from '../../src/audit/flag';
import type { Limits } from '../../src/study/study';
import type { Axes } from '../bench/axes';
import { bandTitle, outcomeTitle } from './places';

export interface FlagWords {
  title: string;
  /** What is held against the limit. */
  measure: string;
  limit: keyof Limits | null;
}

export const FLAGS: Record<FlagId, FlagWords> = {
  empty: { title: 'Empty', measure: 'Events', limit: null },
  thin: { title: 'Thin', measure: 'Effective entries', limit: 'thin' },
  'prior-led': { title: 'Led by the prior', measure: 'Prior share', limit: 'prior-led' },
  lossy: { title: 'Lossy', measure: 'Efficiency', limit: 'lossy' },
  'spill-below': { title: 'Spill below', measure: 'Probability', limit: 'spill-below' },
  'spill-above': { title: 'Spill above', measure: 'Probability', limit: 'spill-above' },
  'feed-in': { title: 'Feed-in', measure: 'Share from outside', limit: 'feed-in' },
  unstable: { title: 'Unstable', measure: 'Stability', limit: 'unstable' },
  impure: { title: 'Impure', measure: 'Purity', limit: 'impure' },
  'non-monotone': { title: 'Not monotone', measure: 'Step of the mean', limit: null },
  'slope-bias': { title: 'Slope bias', measure: 'Slope bias, sd', limit: 'slope-bias' },
  'run-drift': { title: 'Run drift', measure: 'Largest distance of a run', limit: 'run-drift-distance' },
  'single-event': { title: 'Single event', measure: 'Share of the squared weight', limit: 'single-event' },
  'negative-weight': { title: 'Negative weight', measure: 'Cells', limit: null },
  duplicate: { title: 'Duplicates', measure: 'Repeated identities', limit: null },
  'ill-conditioned': { title: 'Ill-conditioned', measure: 'Resolvable components', limit: null },
  'matrix-limited': {
    title: 'Limited by the matrix',
    measure: 'Ratio of variances',
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
