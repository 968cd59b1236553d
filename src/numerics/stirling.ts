const HALF_LOG_TWO_PI = 0.5 * Math.log(2 * Math.PI);

/** Stirling's series is right to 1e-17 from here on with the terms below (the next is 7e-18 at 12). */
const SERIES_FROM = 12;
/** `B_2k / (2k (2k - 1))` for k = 1, 2, ... (Abramowitz & Stegun 6.1.41). */
const SERIES = [1 / 12, -1 / 360, 1 / 1260, -1 / 1680, 1 / 1188, -691 / 360360, 1 / 156];

/**
 * What Stirling's formula leaves out: `ln Gamma(x) - ((x - 1/2) ln x - x + ln(2 pi) / 2)` for `x > 0`. Absolute error below 1e-15 from
 * x = 1 on and below 1e-14 from 1e-3 on. The same is missing from `ln x! = (x + 1/2) ln x - x + ln(2 pi) / 2`.
 */
export function stirlingError(x: number): number {
  let below = 0;
  let z = x;
  for (; z < SERIES_FROM; z++) below += (z + 0.5) * Math.log1p(1 / z) - 1;
  const square = 1 / (z * z);
  let series = 0;
  for (let k = SERIES.length - 1; k >= 0; k--) series = series * square + SERIES[k]!;
  return below + series / z;
}

/** `ln Gamma(x)` for `x > 0`, with the absolute error of its leading term. */
export function logGamma(x: number): number {
  return (x - 0.5) * Math.log(x) - x + HALF_LOG_TWO_PI + stirlingError(x);
}

/** Up to this relative distance the logarithm is summed as a series (Loader's choice). */
const NEAR = 0.1;

/**
 * The deviance `x ln(x / m) + m - x` of `x >= 0` from `m > 0`, without cancellation where they are close; `excess` is `x - m`, for
 * callers that know it better than by subtraction.
 * Source: Loader, "Fast and accurate computation of binomial probabilities" (2000).
 */
export function deviance(x: number, m: number, excess = x - m): number {
  if (x === 0) return m;
  const v = excess / (x + m);
  return Math.abs(v) < NEAR ? nearDeviance(x, excess, v) : x * (Math.log(x) - Math.log(m)) - excess;
}

/** `ln(x / m) = 2 artanh v` with `v = (x - m) / (x + m)`, as a series. */
function nearDeviance(x: number, excess: number, v: number): number {
  const square = v * v;
  let sum = excess * v;
  let power = 2 * x * v;
  for (let k = 3; ; k += 2) {
    power *= square;
    const next = sum + power / k;
    if (next === sum) return sum;
    sum = next;
  }
}

/** `ln` of the Poisson probability of `k` at mean `mean > 0`. Source: Loader (2000). */
export function logPoisson(k: number, mean: number): number {
  if (k === 0) return -mean;
  return -stirlingError(k) - deviance(k, mean) - HALF_LOG_TWO_PI - 0.5 * Math.log(k);
}
