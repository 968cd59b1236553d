import type { Bands } from './bands';
import { at, INSIDE, picture } from './frame';
import { Markup, markup } from './markup';

/** Bands drawn along a side at the most: beyond them neighbours are drawn together, the fullest cell of each group. */
const MOST_DRAWN = 320;

/**
 * A picture of cells `[columns, rows]`, column index across and row index up, each filled by its level: `fills[0]` is the paper
 * and not drawn. Cells of one level are one path.
 */
export function cellPicture(options: {
  name: string;
  across: Bands;
  up: Bands;
  /** From 0 to `fills.length - 1`. */
  level: (column: number, row: number) => number;
  fills: readonly string[];
}): Markup {
  const { name, across, up, level, fills } = options;
  const height = up.length;
  const paths = fills.map((): string[] => []);
  const rows = groupsOf(up);
  for (const column of groupsOf(across)) {
    // Neighbours of one level make one rectangle.
    let begun = { level: 0, from: 0, to: 0 };
    const end = (): void => {
      if (begun.level > 0) paths[begun.level]!.push(rectangle(column, begun, height));
    };
    for (const row of rows) {
      const found = mostIn(column, row, level);
      if (found === begun.level && row.from === begun.to) begun.to = row.to;
      else {
        end();
        begun = { level: found, from: row.from, to: row.to };
      }
    }
    end();
  }
  const body = paths.map((parts, i) =>
    parts.length > 0 ? markup`<path fill="${fills[i]!}" d="${parts.join('')}"/>` : NOTHING,
  );
  const frames = markup`<path class="cells" d="${framesOf(across, up)}"/>`;
  return picture({ height, name, across, up: { bands: up }, body: [...body, frames] });
}

const NOTHING = markup``;

interface Group {
  first: number;
  end: number;
  from: number;
  to: number;
}

/** Bands that are drawn together, in the order in which they lie. A gap is never inside a group. */
function groupsOf({ from, to }: Bands): Group[] {
  const order = [...from.keys()].sort((a, b) => from[a]! - from[b]!);
  const every = Math.ceil(order.length / MOST_DRAWN);
  const groups: Group[] = [];
  for (const i of order) {
    const last = groups.at(-1);
    const follows = last && last.to === from[i]! && last.end === i;
    if (follows && last.end - last.first < every) Object.assign(last, { end: i + 1, to: to[i]! });
    else groups.push({ first: i, end: i + 1, from: from[i]!, to: to[i]! });
  }
  return groups;
}

function mostIn(columns: Group, rows: Group, level: (column: number, row: number) => number): number {
  let most = 0;
  for (let j = columns.first; j < columns.end; j++) {
    for (let k = rows.first; k < rows.end; k++) most = Math.max(most, level(j, k));
  }
  return most;
}

function rectangle({ from, to }: Group, row: { from: number; to: number }, height: number): string {
  return `M${at(from)} ${at(height - row.to)}H${at(to)}V${at(height - row.from)}H${at(from)}z`;
}

/** The outlines of the window and of the outer bands: where cells can be at all. */
function framesOf(across: Bands, up: Bands): string {
  const blocks = (bands: Bands): { from: number; to: number }[] => {
    const joined: { from: number; to: number }[] = [];
    for (const { from, to } of groupsOf(bands)) {
      const last = joined.at(-1);
      if (last && last.to === from) last.to = to;
      else joined.push({ from, to });
    }
    return joined;
  };
  return blocks(across)
    .flatMap((column) => blocks(up).map((row) => rectangle({ first: 0, end: 0, ...column }, row, up.length)))
    .join('');
}

/** Room across that columns have in every picture. */
export const ACROSS = INSIDE.width;
