import { conditionalsOf, shareOut } from '../numerics/multinomial-variate';
import type { RandomStream } from '../numerics/random';

/**
 * Contents of a few groups (runs, campaigns) over the same outcomes, `[groups, outcomes]`, C order, none negative.
 * `scale` is `null` for counts. For weighted contents it is each outcome's mean weight scale `sum V / sum W`, so that a
 * content is taken as a scaled Poisson variate (Bohm & Zech, NIM A 748 (2014) 1, from memory).
 */
export interface GroupTable {
  groups: number;
  outcomes: number;
  contents: Float64Array;
  scale: Float64Array | null;
}

/** Test of the hypothesis that all groups share one set of outcome probabilities. */
export interface Homogeneity {
  /** Likelihood-ratio statistic `G^2 = 2 sum n ln(n / expected)`; contents over their common scale where weighted. */
  gSquared: number;
  /** `(groups with content - 1) (outcomes with content - 1)`. */
  freedom: number;
  pValue: number;
  /** Bootstrap tables drawn for the p-value. */
  draws: number;
  /** Largest total-variation distance of a group from the pool of all, and that group. */
  distance: number;
  group: number;
  /** What that largest distance comes to on average where all groups are alike: the part of it that is noise. */
  expectedDistance: number;
}

/** Exceedances after which the bootstrap stops, and the most tables it draws. */
export interface Bootstrap {
  exceedances: number;
  most: number;
}

/** Ten exceedances keep the relative error of a p-value near 30 %, and end the search of an unremarkable column soon. */
export const EXCEEDANCES = 10;

/** A p-value that is proved to be at most this is given by its bound: drawing could only say "none of so many". */
export const PROVED = 1e-6;

/** `G^2` that differ by less than their rounding are equal: without it a table would not count as at its own value. */
export const TIE = 1e-10;

/**
 * Likelihood-ratio test of homogeneity with a parametric bootstrap from the pooled shares. The bootstrap is sequential:
 * it stops at the `h`-th table at or above the observed `G^2` with `p = h / tables`, or after `most` with
 * `p = (exceedances + 1) / (most + 1)`; so stopped, `P(p <= alpha) <= alpha` holds as without stopping (Besag & Clifford,
 * "Sequential Monte Carlo p-values", Biometrika 78 (1991) 301, from memory).
 * Counts: each group's total is kept and shared out by a multinomial; a `G^2` far out is given its proved bound instead.
 * Being drawn from estimated shares, p-values come out slightly small where many outcomes hold a single event (0.2 for
 * 0.22); the tail below 0.05 is right within the error of a simulation of 12,000 tables. Weighted contents: independent scaled Poisson variates. `null` with fewer than two groups that have content.
 */
export function homogeneityOf(table: GroupTable, stream: RandomStream, bootstrap: Bootstrap): Homogeneity | null {
  const kept = withContent(table);
  if (kept.table.groups < 2) return null;
  const { groups, outcomes, scale } = kept.table;
  const observed = statisticOf(kept.table);
  const gSquared = observed.likelihood / commonScale(kept.table);
  const bound = scale ? 1 : tailBound(gSquared, groups * (outcomes - 1));
  const few = { exceedances: EXCEEDANCES, most: EXCEEDANCES };
  const test = sequentialTest(kept.table, observed.likelihood, stream, bound <= PROVED ? few : bootstrap);
  return {
    gSquared,
    freedom: (groups - 1) * (outcomes - 1),
    pValue: bound <= PROVED ? bound : test.pValue,
    draws: test.draws,
    distance: observed.distance,
    group: kept.groups[observed.group]!,
    expectedDistance: test.expectedDistance,
  };
}

/**
 * `P(G^2 >= g)` is at most this under homogeneity, for counts of any size: `sum n_r KL(p_r, p)` of the true shares is at
 * least `G^2 / 2`, and its moment generating function at most `(1 - lambda)^-freedom`, `freedom` = groups x (outcomes - 1)
 * (Agrawal, "Finite-sample concentration of the multinomial in relative entropy", arXiv:1904.02291, from memory).
 */
export function tailBound(gSquared: number, freedom: number): number {
  const t = gSquared / 2;
  if (t <= freedom || freedom === 0) return 1;
  return Math.exp(freedom * (1 + Math.log(t / freedom)) - t);
}

/** The table without empty groups and outcomes, and where its groups stood. */
function withContent(table: GroupTable): { table: GroupTable; groups: number[] } {
  const at = (g: number, k: number): number => table.contents[g * table.outcomes + k]!;
  const all = { groups: [...Array(table.groups).keys()], outcomes: [...Array(table.outcomes).keys()] };
  const groups = all.groups.filter((g) => all.outcomes.some((k) => at(g, k) > 0));
  const outcomes = all.outcomes.filter((k) => groups.some((g) => at(g, k) > 0));
  const contents = Float64Array.from(groups.flatMap((g) => outcomes.map((k) => at(g, k))));
  const scale = table.scale && Float64Array.from(outcomes, (k) => table.scale![k]!);
  return { table: { groups: groups.length, outcomes: outcomes.length, contents, scale }, groups };
}

interface Margins {
  rows: Float64Array;
  pool: Float64Array;
  all: number;
}

function marginsOf({ groups, outcomes, contents }: GroupTable): Margins {
  const rows = new Float64Array(groups);
  const pool = new Float64Array(outcomes);
  let all = 0;
  for (let g = 0, at = 0; g < groups; g++) {
    for (let k = 0; k < outcomes; k++, at++) {
      rows[g]! += contents[at]!;
      pool[k]! += contents[at]!;
      all += contents[at]!;
    }
  }
  return { rows, pool, all };
}

interface Statistic {
  /** `2 sum content ln(content / expected)`, in units of content. */
  likelihood: number;
  distance: number;
  group: number;
}

function statisticOf(table: GroupTable): Statistic {
  const { groups, outcomes, contents } = table;
  const { rows, pool, all } = marginsOf(table);
  const found: Statistic = { likelihood: 0, distance: 0, group: 0 };
  for (let g = 0, at = 0; g < groups; g++) {
    const share = all > 0 ? rows[g]! / all : 0;
    let shift = 0;
    for (let k = 0; k < outcomes; k++, at++) {
      const expected = share * pool[k]!;
      const content = contents[at]!;
      if (content > 0) found.likelihood += 2 * content * Math.log(content / expected);
      shift += Math.abs(content - expected);
    }
    const distance = rows[g]! > 0 ? shift / (2 * rows[g]!) : 0;
    if (distance > found.distance) {
      found.distance = distance;
      found.group = g;
    }
  }
  // Rounding alone can carry the statistic of identical groups below 0.
  found.likelihood = Math.max(0, found.likelihood);
  return found;
}

/** The weight scale of the whole table: the content-weighted mean of its outcomes' scales, 1 for counts. */
function commonScale(table: GroupTable): number {
  if (!table.scale) return 1;
  const { pool, all } = marginsOf(table);
  return pool.reduce((sum, content, k) => sum + content * table.scale![k]!, 0) / all;
}

function sequentialTest(
  table: GroupTable,
  observed: number,
  stream: RandomStream,
  { exceedances, most }: Bootstrap,
): { pValue: number; draws: number; expectedDistance: number } {
  const drawn = { ...table, contents: new Float64Array(table.contents.length) };
  const margins = marginsOf(table);
  const conditionals = conditionalsOf(margins.pool);
  let distances = 0;
  let above = 0;
  for (let draws = 1; draws <= most; draws++) {
    drawAlike(table, margins, conditionals, stream, drawn.contents);
    const { likelihood, distance } = statisticOf(drawn);
    distances += distance;
    if (reaches(likelihood, observed)) above++;
    if (above === exceedances) return { pValue: above / draws, draws, expectedDistance: distances / draws };
  }
  return { pValue: (above + 1) / (most + 1), draws: most, expectedDistance: distances / most };
}

/** A table under the hypothesis: every group from the pooled shares. */
function drawAlike(
  table: GroupTable,
  { rows, pool, all }: Margins,
  conditionals: Float64Array,
  stream: RandomStream,
  out: Float64Array,
): void {
  const { groups, outcomes, scale } = table;
  for (let g = 0; g < groups; g++) {
    const row = out.subarray(g * outcomes, (g + 1) * outcomes);
    if (!scale) shareOut(stream, rows[g]!, conditionals, row);
    else
      for (let k = 0; k < outcomes; k++) row[k] = scale[k]! * stream.poisson((rows[g]! * pool[k]!) / all / scale[k]!);
  }
}

/** Whether a statistic is at or above the observed one, equal up to rounding included. */
export function reaches(statistic: number, observed: number): boolean {
  return statistic >= observed * (1 - TIE);
}

/**
 * Benjamini-Hochberg adjusted p-values, in the order given: the hypotheses with an adjusted value of at most `alpha` are
 * those rejected at false discovery rate `alpha`. Source: Benjamini & Hochberg, J. R. Stat. Soc. B 57 (1995) 289.
 */
export function falseDiscoveryAdjusted(pValues: readonly number[]): number[] {
  const order = [...pValues.keys()].sort((a, b) => pValues[b]! - pValues[a]!);
  const adjusted = new Array<number>(pValues.length);
  let least = 1;
  order.forEach((index, place) => {
    least = Math.min(least, (pValues[index]! * pValues.length) / (pValues.length - place));
    adjusted[index] = least;
  });
  return adjusted;
}
