import type { ListedMeasure } from '../../audit/measure';
import type { Bands } from './bands';
import { at, INSIDE, picture } from './frame';
import { Markup, markup } from './markup';
import { placeOn, type Scale } from './ticks';

export interface MeasurePicture {
  name: string;
  across: Bands;
  /** One reading a band. */
  measure: Pick<ListedMeasure, 'value' | 'lower' | 'upper'>;
  title: string;
  kind: 'linear' | 'log';
  /** Ends of the scale; what lies beyond is drawn at its end. */
  from: number;
  to: number;
  /** Drawn from the foot as a bar, instead of a line at the value with its interval behind. */
  bars?: boolean;
  limit?: { value: number; text: string } | undefined;
  height?: number;
}

const HEIGHT = 130;

/** Readings over columns or bins: the interval as a grey band, the value as a line in it, a limit as a dashed line. */
export function measurePicture(options: MeasurePicture): Markup {
  const { name, across, measure, kind, from, to, title, bars = false, limit, height = HEIGHT } = options;
  const scale: Scale = { kind, from, to, low: height, high: 0 };
  const place = (value: number): number => placeOn(scale, value);
  const body = measure.value.map((value, i) => {
    if (value === null) return NOTHING;
    const [left, right] = [across.from[i]!, across.to[i]!];
    if (bars) return barOf(left, right, place(value), height);
    return readingOf(left, right, place(value), measure.lower[i] ?? null, measure.upper[i] ?? null, place);
  });
  if (limit && limit.value >= from && limit.value <= to) body.push(limitLine(place(limit.value), limit.text));
  return picture({ height, name, across, up: { scale, title }, body });
}

const NOTHING = markup``;

function barOf(left: number, right: number, top: number, height: number): Markup {
  return markup`<path class="bar" d="M${at(left)} ${height}V${at(top)}H${at(right)}V${height}"/>`;
}

function readingOf(
  left: number,
  right: number,
  middle: number,
  lower: number | null,
  upper: number | null,
  place: (value: number) => number,
): Markup {
  const line = markup`<path class="value" d="M${at(left)} ${at(middle)}H${at(right)}"/>`;
  if (lower === null || upper === null) return line;
  const band = `M${at(left)} ${at(place(lower))}H${at(right)}V${at(place(upper))}H${at(left)}z`;
  return markup`<path class="band" d="${band}"/>${line}`;
}

function limitLine(y: number, text: string): Markup {
  return markup`<path class="limit" d="M0 ${at(y)}H${at(INSIDE.width)}"/><text class="limit-text" x="${at(INSIDE.width - 2)}" y="${at(y - 3)}">${text}</text>`;
}

/** Ends of a scale for readings: their intervals with a little air; on a log scale at least one decade. */
export function endsFor(
  { value, lower, upper }: Pick<ListedMeasure, 'value' | 'lower' | 'upper'>,
  kind: 'linear' | 'log',
  also: readonly number[] = [],
): { from: number; to: number } {
  const known = [...value, ...lower, ...upper, ...also].filter((x) => x !== null);
  const usable = kind === 'log' ? known.filter((x) => x > 0) : known;
  if (usable.length === 0) return { from: kind === 'log' ? 0.1 : 0, to: 1 };
  const [least, most] = [usable.reduce((a, b) => Math.min(a, b)), usable.reduce((a, b) => Math.max(a, b))];
  if (kind === 'log') return { from: Math.min(least / 1.3, most / 10), to: most * 1.3 };
  const air = (most - least) * 0.05 || Math.abs(most) * 0.05 || 1;
  return { from: least >= 0 ? Math.max(0, least - air) : least - air, to: most + air };
}
