import erfc from '@stdlib/math-base-special-erfc';
import erfcinv from '@stdlib/math-base-special-erfcinv';

/** Distribution function of the standard normal, accurate in the lower tail; infinities give 0 and 1. */
export function normalCdf(x: number): number {
  return erfc(-x / Math.SQRT2) / 2;
}

/** Quantile of the standard normal at `p` in `[0, 1]`; the ends give infinities. */
export function normalQuantile(p: number): number {
  return -Math.SQRT2 * erfcinv(2 * p);
}
