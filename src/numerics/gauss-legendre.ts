/**
 * Nodes and weights of the Gauss-Legendre rule of `n` points on `[-1, 1]`, nodes increasing, by Newton's method on the
 * Legendre recurrence from the classical first guess `cos(pi (i + 3/4) / (n + 1/2))` (Abramowitz & Stegun 25.4.29, from memory).
 */
export function gaussLegendre(n: number): { nodes: Float64Array; weights: Float64Array } {
  const nodes = new Float64Array(n);
  const weights = new Float64Array(n);
  for (let i = 0; i < n; i++) {
    let x = Math.cos((Math.PI * (n - i - 0.25)) / (n + 0.5));
    // Newton doubles the digits each turn and starts with at least two: five turns reach double precision.
    for (let turn = 0; turn < 5; turn++) {
      const { value, slope } = legendre(n, x);
      x -= value / slope;
    }
    nodes[i] = x;
    weights[i] = 2 / ((1 - x * x) * legendre(n, x).slope ** 2);
  }
  return { nodes, weights };
}

/** The Legendre polynomial of degree `n >= 1` and its derivative inside `(-1, 1)`. */
function legendre(n: number, x: number): { value: number; slope: number } {
  let before = 1;
  let value = x;
  for (let k = 2; k <= n; k++) [before, value] = [value, ((2 * k - 1) * x * value - (k - 1) * before) / k];
  return { value, slope: (n * (before - x * value)) / (1 - x * x) };
}
