/** The three answers of a limit; see statistics.md 6. */
export type FlagState = 'flagged' | 'undecided' | 'clear';

/** Every flag, in the order in which they are listed. */
export const FLAG_IDS = [
  'empty',
  'thin',
  'prior-led',
  'lossy',
  'spill-below',
  'spill-above',
  'feed-in',
  'unstable',
  'impure',
  'non-monotone',
  'slope-bias',
  'run-drift',
  'single-event',
  'negative-weight',
  'duplicate',
  'ill-conditioned',
  'matrix-limited',
] as const;
export type FlagId = (typeof FLAG_IDS)[number];

/** One answer of the audit: of one measure at one place. `clear` ones are listed too. */
export interface Flag {
  id: FlagId;
  /** Name of the column, or of the reconstructed bin; both `null` for the list or the matrix as a whole. */
  column: string | null;
  bin: string | null;
  state: FlagState;
  value: number | null;
  /** Ends of the measure's interval at the study's credibility; `null` where the measure has none. */
  lower: number | null;
  upper: number | null;
  limit: number;
  /** Posterior probability that the measure is beyond the limit; `null` where there is no posterior. */
  probability: number | null;
  /** What was seen, in numbers. */
  evidence: string;
  /** What to do about it; empty for `clear`. */
  advice: string;
}

/** The answer of a limit by posterior probability of lying beyond it. */
export function answer(probability: number, credibility: number): FlagState {
  if (probability >= credibility) return 'flagged';
  return probability <= 1 - credibility ? 'clear' : 'undecided';
}
