import type { Bands } from './bands';
import { at, HATCHES, picture } from './frame';
import { SHAPES } from './flag-words';
import { Markup, markup } from './markup';
import type { ColumnVerdict, Verdict } from './verdicts';

export const VERDICT_FILLS: Record<Verdict, string> = { sound: HATCHES[0], care: HATCHES[1], unsound: HATCHES[3] };
export const VERDICT_MARKS: Record<Verdict, string> = { sound: '', care: SHAPES.undecided, unsound: SHAPES.flagged };

const HEIGHT = 34;
const BOX = 16;
/** A mark has this room at the least; where columns are narrower the first of neighbours of one verdict bears it. */
const MARK_ROOM = 9;

/** The columns along the true axis, each filled and marked by its verdict. */
export function verdictStrip(across: Bands, verdicts: readonly ColumnVerdict[], name: string): Markup {
  let last = -Infinity;
  const body = verdicts.map(({ verdict }, j) => {
    const [left, right] = [across.from[j]!, across.to[j]!];
    const box = markup`<path class="box" fill="${VERDICT_FILLS[verdict]}" d="M${at(left)} ${HEIGHT - BOX}H${at(right)}V${HEIGHT}H${at(left)}z"/>`;
    const middle = (left + right) / 2;
    if (VERDICT_MARKS[verdict] === '' || middle - last < MARK_ROOM) return box;
    last = middle;
    return markup`${box}<text class="mark" x="${at(middle)}" y="${HEIGHT - BOX - 5}">${VERDICT_MARKS[verdict]}</text>`;
  });
  const blank = { ...across, ticks: [], title: '' };
  return picture({ height: HEIGHT, name, across, up: { bands: blank }, body });
}
