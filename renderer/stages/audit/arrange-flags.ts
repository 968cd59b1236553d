import type { Flag, FlagState } from '../../../src/audit/flag';

export type FlagOrder = 'kind' | 'place' | 'probability';

export interface Arrangement {
  /** Only this kind; empty for all. */
  id: string;
  words: string;
  order: FlagOrder;
  place: (flag: Flag) => string;
  title: (flag: Flag) => string;
}

/** The flags that hold every word, by answer, the gravest first; inside an answer in the order asked for. */
export function arrangeFlags(flags: readonly Flag[], arrangement: Arrangement): { state: FlagState; flags: Flag[] }[] {
  const { id, words, order, place, title } = arrangement;
  const sought = words.toLowerCase().split(/\s+/).filter(Boolean);
  const kept = flags.filter((flag) => {
    const text = `${title(flag)} ${place(flag)} ${flag.evidence}`.toLowerCase();
    return (id === '' || flag.id === id) && sought.every((word) => text.includes(word));
  });
  const sorted = order === 'kind' ? kept : [...kept].sort(comparisons(flags)[order]);
  return (['flagged', 'undecided', 'clear'] as const).map((state) => ({
    state,
    flags: sorted.filter((flag) => flag.state === state),
  }));
}

function comparisons(flags: readonly Flag[]): Record<Exclude<FlagOrder, 'kind'>, (a: Flag, b: Flag) => number> {
  const places = [...new Set(flags.map((flag) => `${flag.column} ${flag.bin}`))];
  const at = new Map(places.map((name, i) => [name, i]));
  const order = (flag: Flag) => at.get(`${flag.column} ${flag.bin}`) ?? 0;
  return {
    place: (a, b) => order(a) - order(b),
    probability: (a, b) => (b.probability ?? -1) - (a.probability ?? -1),
  };
}
