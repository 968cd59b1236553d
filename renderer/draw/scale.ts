import { scaleLinear, scaleLog, type ScaleContinuousNumeric } from 'd3';

export type Scale = ScaleContinuousNumeric<number, number>;

export interface Extent {
  kind: 'linear' | 'log';
  from: number;
  to: number;
}

/** A scale of the domain onto pixels. Values that a log scale has no place for are put at its lower end. */
export function makeScale({ kind, from, to }: Extent, range: [number, number]): Scale {
  const scale = kind === 'log' ? scaleLog() : scaleLinear();
  return scale.domain([from, to]).range(range);
}

/** Pixel of a value: clamped to the range, the low end for a value without a logarithm. */
export function placeOn(scale: Scale, value: number): number {
  const [from = 0, to = 1] = scale.domain();
  const inside = Math.min(Math.max(value, Math.min(from, to)), Math.max(from, to));
  return scale(Number.isNaN(inside) ? from : inside);
}
