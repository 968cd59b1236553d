import type { Bands } from './bands';
import { Markup, markup } from './markup';
import { ticksOn, type Scale, type Tick } from './ticks';

/** Width of every picture, in its own units: the text of a page is as wide. */
export const WIDTH = 680;
const MARGIN = { left: 52, right: 8, top: 8, bottom: 34 };
const TICK = 4;
const TICK_ROOM = 24;

/** The inside of a picture: columns lie across it, from `left`. */
export const INSIDE = { left: MARGIN.left, top: MARGIN.top, width: WIDTH - MARGIN.left - MARGIN.right };

/** A coordinate in a picture, to a hundredth of its unit: below what any printer shows. */
export function at(value: number): string {
  return String(Math.round(value * 100) / 100);
}

/** A picture with its frame: `body` is drawn in coordinates whose origin is the inside's upper left corner. */
export function picture(options: {
  height: number;
  /** Read out where the picture cannot be seen. */
  name: string;
  across: Bands;
  up: { scale: Scale; title: string } | { bands: Bands };
  body: readonly Markup[];
}): Markup {
  const { height, name, across, up, body } = options;
  const all = height + MARGIN.top + MARGIN.bottom;
  const side = 'bands' in up ? up.bands : { ticks: ticksOn(up.scale, TICK_ROOM), title: up.title };
  // Bands are counted from below, the picture from above.
  const sideTicks = 'bands' in up ? side.ticks.map((tick) => ({ ...tick, at: height - tick.at })) : side.ticks;
  const hasSide = sideTicks.length > 0;
  return markup`<svg viewBox="0 0 ${WIDTH} ${all}" role="img" aria-label="${name}"><g transform="translate(${MARGIN.left} ${MARGIN.top})">${body}
<path class="axis" d="M0 ${hasSide ? 0 : height}V${height}H${at(INSIDE.width)}"/>${readable(across.ticks).map((tick) => acrossTick(tick, height))}${sideTicks.map(sideTick)}
<text class="title" x="${at(INSIDE.width / 2)}" y="${height + 30}">${across.title}</text>
<text class="title" transform="translate(-42 ${at(height / 2)}) rotate(-90)">${side.title}</text></g></svg>`;
}

function acrossTick({ at: x, text }: Tick, height: number): Markup {
  return markup`<path class="axis" d="M${at(x)} ${height}v${TICK}"/><text class="across" x="${at(x)}" y="${height + 15}">${text}</text>`;
}

function sideTick({ at: y, text }: Tick): Markup {
  return markup`<path class="axis" d="M0 ${at(y)}h-${TICK}"/><text class="side" x="-6" y="${at(y + 3)}">${text}</text>`;
}

/** Width of a letter, and room between labels, in the units of a picture. */
const LETTER = 5.6;
const BETWEEN = 3;

/** Ticks whose labels do not run into each other: the names of outer bands stay, numbers beside them lose theirs. */
function readable(ticks: readonly Tick[]): Tick[] {
  const kept: Tick[] = [];
  const isNumber = ({ text }: Tick): boolean => /\d/.test(text);
  const half = ({ text }: Tick): number => (text.length * LETTER) / 2;
  const order = [...ticks.filter((tick) => !isNumber(tick)), ...ticks.filter(isNumber)];
  return order.map((tick) => {
    const hits = kept.some((other) => Math.abs(other.at - tick.at) < half(other) + half(tick) + BETWEEN);
    if (!hits) kept.push(tick);
    return hits ? { ...tick, text: '' } : tick;
  });
}

/** How areas are filled: greys for a size, hatching for doubt, so that both are told apart without colour. */
export const GREYS = ['#fff', '#e4e1da', '#c2beb5', '#96918a', '#625d57', '#1d1b18'] as const;
export const HATCHES = ['#fff', 'url(#h1)', 'url(#h2)', 'url(#h3)', 'url(#h4)', '#1d1b18'] as const;

/** Stripes of growing darkness, across the diagonal of a matrix. They stand once in a document, before every picture that is filled with them. */
export const PATTERNS = markup`<svg class="patterns" width="0" height="0" aria-hidden="true"><defs>${[
  { size: 8, width: 1.2 },
  { size: 5, width: 1.6 },
  { size: 3.4, width: 2 },
  { size: 2.6, width: 2.8 },
].map(
  ({ size, width }, i) =>
    markup`<pattern id="h${i + 1}" width="${size}" height="${size}" patternUnits="userSpaceOnUse" patternTransform="rotate(-45)"><rect width="${size}" height="${size}" fill="#fff"/><path d="M0 0V${size}" stroke="#1d1b18" stroke-width="${width / 2}"/></pattern>`,
)}</defs></svg>`;

/** A legend of fills, in words. */
export function legendOf(entries: readonly { fill: string; text: string }[]): Markup {
  return markup`<p class="legend">${entries.map(
    ({ fill, text }) =>
      markup`<span><svg class="key" viewBox="0 0 16 10" aria-hidden="true"><rect x="0.5" y="0.5" width="15" height="9" fill="${fill}" stroke="#1d1b18" stroke-width="0.6"/></svg> ${text}</span> `,
  )}</p>`;
}
