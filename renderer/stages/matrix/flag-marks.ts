import type { Flag, FlagState } from '../../../src/audit/flag';

export interface Mark {
  x: number;
  state: FlagState;
  /** Places under this mark and the flags that they carry. */
  places: number[];
  flags: Flag[];
}

/** Marks closer than this many pixels become one. */
const APART = 11;

/** One mark for each place that is flagged or undecided; where places lie too close, the graver one stands for all. */
export function flagMarks(
  flags: readonly Flag[],
  place: (flag: Flag) => number | null,
  centre: (i: number) => number,
): Mark[] {
  const found = new Map<number, Flag[]>();
  for (const flag of flags) {
    const at = flag.state === 'clear' ? null : place(flag);
    if (at === null || at < 0 || !Number.isFinite(centre(at))) continue;
    found.set(at, [...(found.get(at) ?? []), flag]);
  }
  const marks: Mark[] = [];
  for (const at of [...found.keys()].sort((a, b) => centre(a) - centre(b))) {
    const x = centre(at);
    const last = marks.at(-1);
    if (last && x - last.x < APART) join(last, at, found.get(at)!);
    else marks.push({ x, state: gravest(found.get(at)!), places: [at], flags: found.get(at)! });
  }
  return marks;
}

function join(mark: Mark, place: number, flags: Flag[]): void {
  mark.places.push(place);
  mark.flags = [...mark.flags, ...flags];
  mark.state = gravest(mark.flags);
}

export function gravest(flags: readonly Flag[]): FlagState {
  if (flags.some((flag) => flag.state === 'flagged')) return 'flagged';
  return flags.some((flag) => flag.state === 'undecided') ? 'undecided' : 'clear';
}
