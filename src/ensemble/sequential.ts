/**
 * The sequential ("stick-breaking") form of a Dirichlet: the breaks `z_k ~ Beta(a_k, b_k)` are independent, and the shares are
 * `p_k = z_k * prod_{l < k} (1 - z_l)`, the last one what is left. For `K` shares there are `K - 1` breaks.
 * Source: Connor & Mosimann, "Concepts of independence for proportions with a generalization of the Dirichlet distribution", JASA 64
 * (1969) 194.
 */
export interface SequentialBetas {
  a: Float64Array;
  b: Float64Array;
}

/**
 * Beta parameters of the breaks of `Dirichlet(shape)`, `[outcome - 1]`: `a_k` the shape of outcome `k`, `b_k` the sum of the shapes after it. A
 * shape of 0 gives `a_k = 0`, a break of 0; no shape above 0 after `k` gives `b_k = 0`, a break of 1. Once nothing is left to
 * break, where both would be 0, it is `a_k = 0, b_k = 1`, a break of 0 like any other of shape 0.
 */
export function sequentialBetas(shape: Float64Array): SequentialBetas {
  const a = shape.slice(0, -1);
  const b = new Float64Array(a.length);
  let after = 0;
  for (let k = a.length - 1; k >= 0; k--) {
    after += shape[k + 1]!;
    b[k] = a[k] === 0 && after === 0 ? 1 : after;
  }
  return { a, b };
}

/** The breaks of shares that are at least 0 and add up to a finite number above 0, 1 or not. Where nothing is left, 0. */
export function breaksOf(shares: Float64Array): Float64Array {
  const breaks = new Float64Array(Math.max(0, shares.length - 1));
  let left = shares[shares.length - 1]!;
  for (let k = breaks.length - 1; k >= 0; k--) {
    left += shares[k]!;
    breaks[k] = left > 0 ? shares[k]! / left : 0;
  }
  return breaks;
}

/** The shares of breaks from 0 to 1: they add up to 1. */
export function sharesOf(breaks: Float64Array): Float64Array {
  const shares = new Float64Array(breaks.length + 1);
  let left = 1;
  for (let k = 0; k < breaks.length; k++) {
    shares[k] = left * breaks[k]!;
    left *= 1 - breaks[k]!;
  }
  shares[breaks.length] = left;
  return shares;
}
