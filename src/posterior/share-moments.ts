import { shareQuadrature, type ShareQuadrature } from './share-quadrature';

/**
 * Exact mean and variance of the summed share of `chosen` outcomes among normalised independent gammas
 * `X_k ~ scale_k Gamma(shape_k)`, by quadrature and not by simulation. Accuracy reached, for total shapes from 1e-3 to
 * 1e9 and scales that span twelve decades: 1e-12 relative on means, 1e-10 on variances (tests/reference/share-moments).
 * Throws `RangeError` where every shape is 0: there is nothing to share.
 */
export function shareMoments(
  shape: Float64Array,
  scale: Float64Array,
  chosen: readonly number[],
): { mean: number; variance: number } {
  requireShape(shape);
  const rule = shareQuadrature(shape, scale);
  const members = new Set(chosen);
  const inside = [...shape.keys()].filter((k) => members.has(k));
  const outside = [...shape.keys()].filter((k) => !members.has(k));
  const mean = sumsOf(rule, inside).mean;
  // The variance of a sum is that of the rest; the smaller of the two is the one that loses no digits.
  return { mean, variance: varianceOf(rule, mean > 0.5 ? outside : inside) };
}

/**
 * Means and variances of every share of a column, `[outcomes]` each, with one rule for all of them. A column of equal
 * scales (`scale` null) is a Dirichlet and has closed moments (Johnson, Kotz & Balakrishnan, ch. 49, from memory).
 */
export function columnMoments(
  shape: Float64Array,
  scale: Float64Array | null,
): { mean: Float64Array; variance: Float64Array } {
  requireShape(shape);
  if (!scale) return dirichletMoments(shape);
  const rule = shareQuadrature(shape, scale);
  const spread = totalSpread(rule);
  const mean = new Float64Array(shape.length);
  const variance = new Float64Array(shape.length);
  // Cells without events share their shape and scale: the first of them serves all.
  const first = new Map<number, number>();
  for (let k = 0; k < shape.length; k++) {
    const same = first.get(shape[k]!);
    if (same !== undefined && scale[same] === scale[k]) {
      mean[k] = mean[same]!;
      variance[k] = variance[same]!;
      continue;
    }
    first.set(shape[k]!, k);
    const sums = sumsOf(rule, [k]);
    mean[k] = sums.mean;
    variance[k] = covariance(sums, sums, sums.shared, sums.spread, spread);
  }
  const largest = mean.indexOf(Math.max(...mean));
  const others = [...shape.keys()].filter((k) => k !== largest);
  if (mean[largest]! > 0.5) variance[largest] = varianceOf(rule, others);
  return { mean, variance };
}

/**
 * Mean and variance of a weighted sum of the shares of a column, `sum factors_k p_k`: a mean reconstructed value, the
 * content below a value, a difference of shares. As exact as the variance of a single share.
 */
export function linearMoments(
  shape: Float64Array,
  scale: Float64Array | null,
  factors: Float64Array,
): { mean: number; variance: number } {
  requireShape(shape);
  if (scale) {
    const rule = shareQuadrature(shape, scale);
    const members = [...shape.keys()];
    const mean = sumsOf(rule, members, factors).mean;
    // A constant taken off every factor moves no variance: about the mean, nothing large is left to cancel.
    return {
      mean,
      variance: varianceOf(
        rule,
        members,
        factors.map((f) => f - mean),
      ),
    };
  }
  const total = shape.reduce((sum, a) => sum + a, 0);
  const mean = shape.reduce((sum, a, k) => sum + (a / total) * factors[k]!, 0);
  const square = shape.reduce((sum, a, k) => sum + (a / total) * (factors[k]! - mean) ** 2, 0);
  return { mean, variance: square / (total + 1) };
}

/** Covariances between the shares of a column, `[outcomes, outcomes]`. */
export function shareCovariances(shape: Float64Array, scale: Float64Array | null): Float64Array {
  const n = shape.length;
  const result = new Float64Array(n * n);
  const { mean, variance } = columnMoments(shape, scale);
  const total = shape.reduce((sum, a) => sum + a, 0);
  const rule = scale && shareQuadrature(shape, scale);
  const spread = rule ? totalSpread(rule) : 0;
  const sums = rule ? [...shape.keys()].map((k) => sumsOf(rule, [k])) : [];
  for (let k = 0; k < n; k++) {
    result[k * n + k] = variance[k]!;
    for (let l = 0; l < k; l++) {
      const value = rule
        ? covariance(sums[k]!, sums[l]!, shared(rule, sums[k]!, sums[l]!), 0, spread)
        : (-mean[k]! * mean[l]!) / (total + 1);
      result[k * n + l] = result[l * n + k] = value;
    }
  }
  return result;
}

/**
 * Averages over the mixing mass that moments of a sum of outcomes, each times its factor, are made of; `rho` is that sum
 * at a node, `d` its deviation from the mean.
 */
interface Sums {
  /** `<rho>`. */
  mean: number;
  /** `<g d>`. */
  tilt: number;
  /** `<g d^2>`. */
  shared: number;
  /** `sum of factor_k^2 <rho_k^2 g / shape_k>`: what the gammas' own variances add. */
  spread: number;
  /** `d` at each node. */
  steps: Float64Array;
}

function sumsOf(rule: ShareQuadrature, members: readonly number[], factors?: Float64Array): Sums {
  const { nodes, mass, total, centre, meanStep, stretch } = rule;
  const steps = new Float64Array(nodes.length);
  let mean = 0;
  let spread = 0;
  for (const k of members) {
    const factor = factors ? factors[k]! : 1;
    const [a, s, share] = [rule.shape[k]!, rule.scale[k]!, factor * rule.atCentre[k]!];
    for (let i = 0; i < nodes.length; i++) {
      const inverse = 1 / (1 + s * nodes[i]!);
      const part = s * nodes[i]! * inverse;
      const weight = ((mass[i]! * a) / total[i]!) * part;
      mean += factor * weight;
      spread += factor * factor * weight * part;
      steps[i]! += share * (meanStep[i]! - s * (nodes[i]! - centre) * inverse) * stretch[i]!;
    }
  }
  let middle = 0;
  for (let i = 0; i < steps.length; i++) middle += mass[i]! * steps[i]!;
  let tilt = 0;
  let shared = 0;
  for (let i = 0; i < steps.length; i++) {
    steps[i]! -= middle;
    tilt += mass[i]! * total[i]! * steps[i]!;
    shared += mass[i]! * total[i]! * steps[i]! ** 2;
  }
  return { mean, tilt, shared, spread, steps };
}

/** `<g d_k d_l>` of two different outcomes. */
function shared(rule: ShareQuadrature, k: Sums, l: Sums): number {
  let sum = 0;
  for (let i = 0; i < rule.mass.length; i++) sum += rule.mass[i]! * rule.total[i]! * k.steps[i]! * l.steps[i]!;
  return sum;
}

/**
 * `Cov(p_k, p_l)` from `E[p_k p_l] = <g rho_k rho_l>`, and `E[p_k^2] = <g rho_k^2 (1 + 1/a_k)>`, with the products of
 * means taken out by hand: `<g> = 1 - spread of all`. For equal scales the deviations vanish and the Dirichlet is left.
 */
function covariance(k: Sums, l: Sums, shared: number, own: number, spread: number): number {
  return own - k.mean * l.mean * spread + k.mean * l.tilt + l.mean * k.tilt + shared;
}

function varianceOf(rule: ShareQuadrature, members: readonly number[], factors?: Float64Array): number {
  const sums = sumsOf(rule, members, factors);
  return Math.max(0, covariance(sums, sums, sums.shared, sums.spread, totalSpread(rule)));
}

function totalSpread(rule: ShareQuadrature): number {
  return sumsOf(rule, [...rule.shape.keys()]).spread;
}

function dirichletMoments(shape: Float64Array): { mean: Float64Array; variance: Float64Array } {
  const total = shape.reduce((sum, a) => sum + a, 0);
  const rest = complements(shape);
  return {
    mean: shape.map((a) => a / total),
    variance: shape.map((a, k) => ((a / total) * (rest[k]! / total)) / (total + 1)),
  };
}

/** The summed shape of all other outcomes, for each outcome, without loss of digits. */
export function complements(shape: Float64Array): Float64Array {
  const total = shape.reduce((sum, a) => sum + a, 0);
  // The difference loses digits where one outcome holds nearly all: that one alone is summed anew.
  const largest = shape.indexOf(Math.max(...shape));
  const others = shape.reduce((sum, a, k) => (k === largest ? sum : sum + a), 0);
  return shape.map((a, k) => (k === largest ? others : total - a));
}

function requireShape(shape: Float64Array): void {
  if (!shape.some((a) => a > 0)) throw new RangeError('every shape is 0: the shares have no distribution');
}
