import { path as makePath } from 'd3';

/**
 * The ends of the bars of a histogram whose edges stand at `places`. One value alone has no width: its bar is `alone` wide
 * and stays between `least` and `most`.
 */
export function barEnds(
  places: Float64Array,
  alone: number,
  least: number,
  most: number,
): { from: ArrayLike<number>; to: ArrayLike<number> } {
  if (places.at(-1) !== places[0]) return { from: places.subarray(0, -1), to: places.subarray(1) };
  const middle = Math.min(Math.max(places[0]!, least + alone / 2), most - alone / 2);
  return { from: [middle - alone / 2], to: [middle + alone / 2] };
}

/** The outline of bars between `from[i]` and `to[i]` from the base line up to `at(i)`; bands of NaN are left out. */
export function barsPath(
  from: ArrayLike<number>,
  to: ArrayLike<number>,
  at: (i: number) => number,
  base: number,
): string {
  const path = makePath();
  for (let i = 0; i < from.length; i++) {
    const top = at(i);
    if (!Number.isFinite(from[i]!) || !Number.isFinite(top) || top === base) continue;
    path.moveTo(from[i]!, base);
    path.lineTo(from[i]!, top);
    path.lineTo(to[i]!, top);
    path.lineTo(to[i]!, base);
    path.closePath();
  }
  return path.toString();
}

/** The same bars lying down: bands along y, lengths along x. */
export function lyingBarsPath(
  from: ArrayLike<number>,
  to: ArrayLike<number>,
  at: (i: number) => number,
  base: number,
): string {
  const path = makePath();
  for (let i = 0; i < from.length; i++) {
    const end = at(i);
    if (!Number.isFinite(from[i]!) || !Number.isFinite(end) || end === base) continue;
    path.moveTo(base, from[i]!);
    path.lineTo(end, from[i]!);
    path.lineTo(end, to[i]!);
    path.lineTo(base, to[i]!);
    path.closePath();
  }
  return path.toString();
}

/** A step line over bands: level in each band, risers where the next band begins at the end of this one. */
export function stepsPath(from: ArrayLike<number>, to: ArrayLike<number>, at: (i: number) => number): string {
  const path = makePath();
  let end = NaN;
  for (let i = 0; i < from.length; i++) {
    const y = at(i);
    if (!Number.isFinite(from[i]!) || !Number.isFinite(y)) {
      end = NaN;
      continue;
    }
    if (Math.abs(from[i]! - end) < TOUCHING) path.lineTo(from[i]!, y);
    else path.moveTo(from[i]!, y);
    path.lineTo(to[i]!, y);
    end = to[i]!;
  }
  return path.toString();
}

/** Boxes from `low(i)` to `high(i)` in each band: an interval band. */
export function boxesPath(
  from: ArrayLike<number>,
  to: ArrayLike<number>,
  low: (i: number) => number,
  high: (i: number) => number,
): string {
  const path = makePath();
  for (let i = 0; i < from.length; i++) {
    const a = low(i);
    const b = high(i);
    if (!Number.isFinite(from[i]!) || !Number.isFinite(a) || !Number.isFinite(b)) continue;
    path.rect(from[i]!, Math.min(a, b), to[i]! - from[i]!, Math.max(LEAST_BOX, Math.abs(a - b)));
  }
  return path.toString();
}

/** A line through points; it breaks where one is not a number. */
export function linePath(xs: ArrayLike<number>, ys: ArrayLike<number>): string {
  const path = makePath();
  let open = false;
  for (let i = 0; i < xs.length; i++) {
    const fine = Number.isFinite(xs[i]!) && Number.isFinite(ys[i]!);
    if (fine && open) path.lineTo(xs[i]!, ys[i]!);
    else if (fine) path.moveTo(xs[i]!, ys[i]!);
    open = fine;
  }
  return path.toString();
}

/** The area between a line and a base. */
export function areaPath(xs: ArrayLike<number>, ys: ArrayLike<number>, base: number): string {
  if (xs.length === 0) return '';
  return `${linePath(xs, ys)}L${xs[xs.length - 1]},${base}L${xs[0]},${base}Z`;
}

/** Bands closer than this many pixels share a riser. */
const TOUCHING = 0.01;
/** An interval narrower than this many pixels is still seen. */
const LEAST_BOX = 1;
