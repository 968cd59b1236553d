import type { Flag } from '../../audit/flag';
import { FLAG_WORDS } from './flag-words';

/** Whether a column may be trusted: as it stands, with care, or not as it stands. */
export type Verdict = 'sound' | 'care' | 'unsound';

export interface ColumnVerdict {
  column: number;
  verdict: Verdict;
  /** Its raised flags, in table order. */
  raised: Flag[];
}

/**
 * The verdict on every column, from its own flags. `unsound`: a flag says that its probabilities are too poorly known, or may be off by
 * more than their intervals. `care`: its probabilities stand, but the instrument tells little there, or an answer is still
 * undecided. `sound`: no flag is raised. Flags of bins and of the matrix are no verdict on a column.
 */
export function columnVerdicts(columns: readonly string[], flags: readonly Flag[]): ColumnVerdict[] {
  const raised = columns.map((): Flag[] => []);
  const place = new Map(columns.map((name, j) => [name, j]));
  for (const flag of flags) {
    if (flag.state !== 'clear' && flag.column !== null) raised[place.get(flag.column)!]!.push(flag);
  }
  return raised.map((own, column) => ({ column, verdict: verdictOf(own), raised: own }));
}

function verdictOf(raised: readonly Flag[]): Verdict {
  if (raised.length === 0) return 'sound';
  return raised.some(isDamning) ? 'unsound' : 'care';
}

function isDamning({ id, state }: Flag): boolean {
  const { kind } = FLAG_WORDS[id];
  return state === 'flagged' && (kind === 'statistics' || kind === 'validity');
}
