import type { Flag, FlagId } from '../../audit/flag';
import { formatCount, formatInterval, formatNumber, formatPercent, formatShare } from '../../audit/wording';

/**
 * What a flag says about the use of a column. `statistics`: too little is known, and more events mend it. `validity`: the
 * intervals may be too narrow, because the response was not the same, or not the one that data will see. `response`: known
 * well enough, and the instrument tells little there. `use`: of the matrix as a whole, or of reconstructed bins.
 */
export type FlagKind = 'statistics' | 'validity' | 'response' | 'use';

export interface FlagWords {
  title: string;
  kind: FlagKind;
  /** Name of the value that is held against the limit. */
  quantity: string;
  show: 'share' | 'number' | 'count' | 'reconstructed';
  /** Which end of the values is the worse one. */
  worse: 'low' | 'high';
}

const words = (
  kind: FlagKind,
  title: string,
  quantity: string,
  show: FlagWords['show'],
  worse: FlagWords['worse'],
): FlagWords => ({ title, kind, quantity, show, worse });

export const FLAG_WORDS: Record<FlagId, FlagWords> = {
  empty: words('statistics', 'empty', 'events', 'number', 'low'),
  thin: words('statistics', 'thin', 'effective entries', 'number', 'low'),
  'prior-led': words('statistics', 'led by the prior', 'prior share', 'share', 'high'),
  lossy: words('response', 'lossy', 'efficiency', 'share', 'low'),
  'spill-below': words('response', 'spill below the window', 'probability below the window', 'share', 'high'),
  'spill-above': words('response', 'spill above the window', 'probability above the window', 'share', 'high'),
  'feed-in': words('use', 'fed from outside', 'share from outside the true window', 'share', 'high'),
  unstable: words('response', 'unstable', 'stability', 'share', 'low'),
  impure: words('use', 'impure', 'purity', 'share', 'low'),
  'non-monotone': words('response', 'not monotone', 'step of the mean', 'reconstructed', 'low'),
  'slope-bias': words('validity', 'slope bias', 'bias over its sd', 'number', 'high'),
  'run-drift': words('validity', 'run drift', 'largest distance of a run', 'number', 'high'),
  'single-event': words('statistics', 'led by a single event', 'share of the squared weight', 'share', 'high'),
  'negative-weight': words('statistics', 'negative weight', 'cells', 'number', 'high'),
  duplicate: words('validity', 'events written twice', 'rows too many', 'number', 'high'),
  'ill-conditioned': words('use', 'ill-conditioned', 'resolvable components', 'count', 'low'),
  'matrix-limited': words('use', 'limited by the matrix', 'matrix over data variance', 'number', 'high'),
};

/** The shapes of the answers, the same everywhere: nothing for clear. */
export const SHAPES = { flagged: '▲', undecided: '○', clear: '' } as const;

/** A flag's value with its interval and unit; a dash where it has none. `unit` is the reconstructed axis's. */
export function flagValue({ id, value, lower, upper }: Flag, unit: string): string {
  if (value === null) return '–';
  const { show } = FLAG_WORDS[id];
  const known = lower !== null && upper !== null;
  if (show === 'share') return known ? formatShare(value, lower, upper) : formatPercent(value);
  if (show === 'count' && known) return `${formatCount(value)} (${formatCount(lower)} to ${formatCount(upper)})`;
  const text = known ? formatInterval(value, lower, upper) : formatNumber(value, 4);
  return show === 'reconstructed' && unit ? `${text} ${unit}` : text;
}

/** A flag's limit, in the unit of its value. */
export function flagLimit({ id, limit }: Flag, unit: string): string {
  const { show } = FLAG_WORDS[id];
  if (show === 'share') return formatPercent(limit);
  return show === 'reconstructed' && unit ? `${formatNumber(limit)} ${unit}` : formatNumber(limit);
}

/** The flag that is furthest beyond its limit; `null` where none has a value. */
export function worstOf(flags: readonly Flag[]): Flag | null {
  const valued = flags.filter(({ value }) => value !== null);
  const sign = valued[0] && FLAG_WORDS[valued[0].id].worse === 'low' ? -1 : 1;
  return valued.reduce<Flag | null>((worst, flag) => {
    return worst === null || sign * (flag.value! - worst.value!) > 0 ? flag : worst;
  }, null);
}
