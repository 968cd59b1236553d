import { gaussLegendre } from '../numerics/gauss-legendre';

/**
 * A one-dimensional rule that turns moments of normalised gammas into sums. For `X_k ~ scale_k Gamma(shape_k)`,
 * `p = X / sum X`, the identity `1/x = int_0^inf exp(-x t) dt` gives, with `M(t) = prod (1 + scale_l t)^(-shape_l)`,
 *
 *     g_k(t) = shape_k scale_k t / (1 + scale_k t),  g = sum g_k,  rho_k = g_k / g,
 *     E[p_k] = int rho_k dm,   dm = g M dt / t,   int dm = 1:
 *
 * a mean share is an average of `rho_k` over the mixing mass `dm`. The rule holds nodes `t` and their masses.
 */
export interface ShareQuadrature {
  shape: Float64Array;
  /** Scales over the largest one of a positive shape: shares do not depend on a common factor. */
  scale: Float64Array;
  nodes: Float64Array;
  mass: Float64Array;
  /** `g` at each node. */
  total: Float64Array;
  /**
   * The node near the middle of the mass, about which differences are taken:
   * `rho_k(t) - rho_k(centre) = atCentre_k (meanStep - e_k) stretch`, `e_k = scale_k (t - centre) / (1 + scale_k t)`.
   * That form is free of cancellation: for large shapes `rho_k` moves by parts in the total shape only, and those parts
   * are what a variance is made of.
   */
  centre: number;
  /** `rho_k(centre)`. */
  atCentre: Float64Array;
  /** Per node: the mean of `e_k` over `atCentre`, and `1 / (1 - that mean)`. */
  meanStep: Float64Array;
  stretch: Float64Array;
}

/**
 * Panels `[0, t0]`, then geometric by this ratio. The integrand's poles lie on the negative axis, outside the ellipse
 * with foci at a panel's ends and `rho = 3`, so that 20 points err by `3^-40`, about 1e-19 of the mass.
 */
const PANEL_RATIO = 4;
const RULE = gaussLegendre(20);

/** Mass beyond the last panel, over the ratio of scales, that no double can show any more. */
const NEGLIGIBLE_MASS = 1e-18;
/** `scale t` beyond which `1 + scale t` is `scale t` to double precision: the rest of the mass has constant shares. */
const SATURATED = 1e17;

/** Builds the rule for one column. `shape` needs at least one positive element. */
export function shareQuadrature(shape: Float64Array, scale: Float64Array): ShareQuadrature {
  const { relative, smallest } = relativeScales(shape, scale);
  const nodes: number[] = [];
  const mass: number[] = [];
  const total: number[] = [];
  const dot = shape.reduce((sum, a, k) => sum + a * relative[k]!, 0);
  let [from, to] = [0, 1 / Math.max(dot, 1)];
  let centre = to;
  for (;;) {
    for (let i = 0; i < RULE.nodes.length; i++) {
      const t = from + ((to - from) / 2) * (1 + RULE.nodes[i]!);
      const { survival, g } = mixing(shape, relative, t);
      nodes.push(t);
      total.push(g);
      mass.push((((to - from) / 2) * RULE.weights[i]! * g * survival) / t);
      if (survival >= 0.5) centre = t;
    }
    const end = mixing(shape, relative, to);
    if (end.survival < NEGLIGIBLE_MASS * smallest || smallest * to > SATURATED) {
      nodes.push(to);
      total.push(end.g);
      mass.push(end.survival);
      break;
    }
    [from, to] = [to, to * PANEL_RATIO];
  }
  return centred(shape, relative, Float64Array.from(nodes), Float64Array.from(mass), Float64Array.from(total), centre);
}

function relativeScales(shape: Float64Array, scale: Float64Array): { relative: Float64Array; smallest: number } {
  let largest = 0;
  let least = Infinity;
  for (let k = 0; k < shape.length; k++) {
    if (!(shape[k]! > 0)) continue;
    largest = Math.max(largest, scale[k]!);
    least = Math.min(least, scale[k]!);
  }
  // A cell of shape 0 has share 0 whatever its scale: it takes the largest, to stay out of the range of scales.
  return { relative: scale.map((s, k) => (shape[k]! > 0 ? s / largest : 1)), smallest: least / largest };
}

/** `M(t)` and `g(t)`. */
function mixing(shape: Float64Array, scale: Float64Array, t: number): { survival: number; g: number } {
  let logSurvival = 0;
  let g = 0;
  for (let k = 0; k < shape.length; k++) {
    const x = scale[k]! * t;
    logSurvival -= shape[k]! * Math.log1p(x);
    g += (shape[k]! * x) / (1 + x);
  }
  return { survival: Math.exp(logSurvival), g };
}

function centred(
  shape: Float64Array,
  scale: Float64Array,
  nodes: Float64Array,
  mass: Float64Array,
  total: Float64Array,
  centre: number,
): ShareQuadrature {
  const { g } = mixing(shape, scale, centre);
  const atCentre = shape.map((a, k) => (a * scale[k]! * centre) / (1 + scale[k]! * centre) / g);
  const meanStep = nodes.map((t) => {
    let sum = 0;
    for (let k = 0; k < shape.length; k++) sum += (atCentre[k]! * (scale[k]! * (t - centre))) / (1 + scale[k]! * t);
    return sum;
  });
  const stretch = nodes.map((t, i) => ((g / centre) * t) / total[i]!);
  return { shape, scale, nodes, mass, total, centre, atCentre, meanStep, stretch };
}
