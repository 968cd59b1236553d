import { betaCdf } from '../numerics/beta';
import { equalTailed, type Interval } from '../posterior/intervals';

/** Mean and variance of a content. */
export interface Content {
  mean: number;
  variance: number;
}

/**
 * Distribution of `X / (X + Y)` for two independent contents, each taken as the gamma variate of its mean and variance:
 * then `X / (X + Y)` is a monotone function of a Beta variate `U`, `x U / (x U + y (1 - U))` with `x`, `y` the scales.
 */
export interface ContentRatio {
  /** `X / (X + Y)` at the means. */
  value: number;
  /** By the delta method. */
  sd: number;
  a: number;
  b: number;
  /** `y / x`. */
  tilt: number;
}

/** Shapes of a content known better than this are as good as certain: its sd is a part in a million of it. */
const MOST_SHAPE = 1e12;

/** `null` where both contents are 0. */
export function contentRatio(own: Content, other: Content): ContentRatio | null {
  const all = own.mean + other.mean;
  if (!(all > 0)) return null;
  const [x, y] = [own.mean / all, other.mean / all];
  const sd = Math.sqrt(y ** 2 * own.variance + x ** 2 * other.variance) / all;
  const [a, b] = [shapeOf(own), shapeOf(other)];
  return { value: x, sd, a, b, tilt: a > 0 && b > 0 ? other.mean / b / (own.mean / a) : 1 };
}

export function ratioInterval({ a, b, tilt }: ContentRatio, credibility: number): Interval {
  const { lower, upper } = equalTailed({ a, b, method: 'matched' }, credibility);
  const tilted = (u: number): number => u / (u + tilt * (1 - u));
  return { lower: tilted(lower), upper: tilted(upper) };
}

/** Posterior probability that the ratio is below a limit between 0 and 1. */
export function ratioBelow({ a, b, tilt }: ContentRatio, limit: number): number {
  if (limit >= 1) return Number(b > 0);
  return betaCdf((tilt * limit) / (1 - limit + tilt * limit), a, b);
}

function shapeOf({ mean, variance }: Content): number {
  return mean > 0 ? Math.min(MOST_SHAPE, mean ** 2 / variance) : 0;
}
