/**
 * Where more calibration events pay. A variance that column `j` adds falls as `c_j / T_j` with its total `T_j = P_j + g_j n_j`: `P_j` now, and
 * `g_j` what each of `n_j` more events adds to it.
 */
export interface Columns {
  /** `P_j > 0`. */
  totals: Float64Array;
  /** `g_j > 0`. */
  growth: Float64Array;
}

/** Turns of the search for the least addition: the bound is met to a part in a thousand long before. */
const MOST_TURNS = 2000;
/** A plan within this part of the best is the best: events are rounded up far more coarsely. */
export const PLAN_PRECISION = 1e-4;

/**
 * The fewest events, `[columns]`, for which `sum_j c[j, k] / T_j <= bound[k]` for every constraint `k`; `c` is `[columns,
 * constraints]`. Square-root rule: at the optimum `n_j > 0` has `1 = g_j sum_k lambda_k c_jk / T_j^2` (stationarity of the Lagrangian, Kuhn &
 * Tucker), hence `T_j = max(P_j, sqrt(g_j sum_k lambda_k c_jk))`; multipliers are found by raising those of violated bounds and lowering those
 * of slack ones in proportion. What is returned meets every bound. Every bound must be above 0.
 */
export function leastAddition({ totals, growth }: Columns, c: Float64Array, bound: Float64Array): Float64Array {
  const constraints = bound.length;
  const usage = (t: Float64Array): Float64Array => {
    const sum = new Float64Array(constraints);
    for (let j = 0; j < t.length; j++) for (let k = 0; k < constraints; k++) sum[k]! += c[j * constraints + k]! / t[j]!;
    return sum;
  };
  const excess = (t: Float64Array): Float64Array => usage(t).map((used, k) => used / bound[k]!);
  const lambda = startingMultipliers(totals, growth, c, bound);
  let t = totals;
  for (let turn = 0; turn < MOST_TURNS; turn++) {
    t = totals.map((p, j) => {
      let sum = 0;
      for (let k = 0; k < constraints; k++) sum += lambda[k]! * c[j * constraints + k]!;
      return Math.max(p, Math.sqrt(growth[j]! * sum));
    });
    const over = excess(t);
    if (isOptimal(lambda, over)) break;
    for (let k = 0; k < constraints; k++) lambda[k]! *= over[k]!;
  }
  return eventsFor(feasible(t, c, excess), totals, growth);
}

/** Multipliers of each constraint as if it stood alone and no column had its events yet: right to some factor. */
function startingMultipliers(
  totals: Float64Array,
  growth: Float64Array,
  c: Float64Array,
  bound: Float64Array,
): Float64Array {
  return bound.map((b, k) => {
    let root = 0;
    for (let j = 0; j < totals.length; j++) root += Math.sqrt(c[j * bound.length + k]! / growth[j]!);
    return (root / b) ** 2;
  });
}

/** Complementary slackness: no bound exceeded, and those that carry the multipliers met. */
function isOptimal(lambda: Float64Array, over: Float64Array): boolean {
  let carried = 0;
  let slack = 0;
  for (let k = 0; k < lambda.length; k++) {
    if (over[k]! > 1 + PLAN_PRECISION) return false;
    carried += lambda[k]!;
    slack += lambda[k]! * (1 - over[k]!);
  }
  return slack <= PLAN_PRECISION * carried;
}

/** Raises the totals of the columns that matter together until no bound is exceeded: by a part in ten thousand, once converged. */
function feasible(t: Float64Array, c: Float64Array, excess: (t: Float64Array) => Float64Array): Float64Array {
  const constraints = c.length / t.length;
  const matters = t.map((_, j) => Number(c.subarray(j * constraints, (j + 1) * constraints).some((x) => x > 0)));
  for (let raised = t; ;) {
    const most = excess(raised).reduce((a, b) => Math.max(a, b), 0);
    if (most <= 1) return raised;
    // A rounding more, so that the product of totals and bounds cannot fall just short again.
    const factor = most * (1 + 4 * Number.EPSILON);
    raised = raised.map((x, j) => (matters[j] ? x * factor : x));
  }
}

/**
 * `events` more spread so that `sum_j w_j / T_j` is least: the square-root rule again, `T_j = max(P_j, tau sqrt(g_j w_j))` with `tau` such
 * that all are used. Spread evenly where no column adds any variance.
 */
export function bestAddition({ totals, growth }: Columns, w: Float64Array, events: number): Float64Array {
  const roots = w.map((weight, j) => Math.sqrt(weight * growth[j]!));
  if (!roots.some((root) => root > 0)) return totals.map(() => events / totals.length);
  const at = (tau: number): Float64Array =>
    eventsFor(
      totals.map((p, j) => Math.max(p, tau * roots[j]!)),
      totals,
      growth,
    );
  const sum = (n: Float64Array): number => n.reduce((a, b) => a + b, 0);
  let low = 0;
  let high = 1;
  while (sum(at(high)) < events) high *= 2;
  while (high - low > Number.EPSILON * high * 4) {
    const middle = (low + high) / 2;
    if (sum(at(middle)) < events) low = middle;
    else high = middle;
  }
  return at(high);
}

function eventsFor(t: Float64Array, totals: Float64Array, growth: Float64Array): Float64Array {
  return t.map((x, j) => Math.max(0, (x - totals[j]!) / growth[j]!));
}
