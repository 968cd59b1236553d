import { binRange, LOST, type Axis } from '../../study/axis';
import { formatNumber } from '../../audit/wording';

/** Digits of an edge that no rounding of binary arithmetic reaches. */
const MOST_DIGITS = 15;
const FEWEST_DIGITS = 3;

/** The edges of a numeric axis in the fewest digits that tell them all apart. */
export function edgeTexts(edges: Float64Array): string[] {
  for (let digits = FEWEST_DIGITS; ; digits++) {
    const texts = Array.from(edges, (edge) => formatNumber(edge, digits));
    if (digits === MOST_DIGITS || new Set(texts).size === texts.length) return texts;
  }
}

/** Names the bands of an axis, its columns or outcomes, in words: `2 to 4 MeV`, `below 2 MeV`, `lost`, a tag. */
export function bandNamer(axis: Axis): (index: number) => string {
  if (axis.kind === 'tags') return (i) => axis.tags[i] ?? LOST;
  return (i) => numericRange(axis.edges, axis.unit, i, i);
}

function numericRange(edges: Float64Array, unit: string, from: number, to: number): string {
  const texts = edgeTexts(edges);
  const end = edges.length;
  const withUnit = (text: string): string => (unit ? `${text} ${unit}` : text);
  if (from > end) return LOST;
  if (from === 0) return withUnit(`below ${to === 0 ? texts[0]! : texts[to]!}`);
  if (to === end) return `${withUnit(texts[from - 1]!)} and up`;
  return withUnit(`${texts[from - 1]!} to ${texts[to]!}`);
}

/**
 * A set of columns in words, neighbours drawn together: `2 to 8 MeV (3 columns), 60 MeV and up`; tags are listed. `all`
 * where it is every one of them.
 */
export function columnsInWords(axis: Axis, columns: readonly number[]): string {
  if (axis.kind === 'tags') return columns.map((j) => axis.tags[j]).join(', ');
  const all = binRange(axis).end + 1;
  if (columns.length === all) return `all ${all} columns`;
  return neighbours(columns)
    .map(([from, to]) => {
      const range = numericRange(axis.edges, axis.unit, from, to);
      return from === to ? range : `${range} (${to - from + 1} columns)`;
    })
    .join(', ');
}

/** Runs of whole numbers that follow each other, first and last of each. */
function neighbours(sorted: readonly number[]): [number, number][] {
  const runs: [number, number][] = [];
  for (const n of sorted) {
    const last = runs.at(-1);
    if (last && n === last[1] + 1) last[1] = n;
    else runs.push([n, n]);
  }
  return runs;
}
