/**
 * Suggested edges of an axis: equal population, bins that follow the resolution, thin bins merged. All keep the
 * window's ends; inner edges are rounded to readable numbers. They are suggestions: the tally and the audit judge them.
 */

/** Counts on fine bins inside a window: `counts[i]` of `[edges[i], edges[i + 1])`. */
export interface FineCounts {
  edges: Float64Array;
  counts: Float64Array;
}

/** Counts of the events in each bin of given edges, as often as asked. */
export type CountIn = (edges: Float64Array) => Promise<Float64Array>;

/** Fine bins of a first look at a window: 4096 resolve a hundred bins to a few percent each where nothing is steep. */
const FIRST_LOOK = 4096;
/** Pieces that a fine bin holding a searched edge is cut into at each further look. */
const PIECES = 16;
/** A fine bin is fine enough when it holds less than this share of a suggested bin. */
const FINE_ENOUGH = 0.01;
/** Looks after the first: each divides the error by `PIECES`, four reach the rounding of the edges. */
const MOST_LOOKS = 4;
/** Edges are rounded to a power of ten of at most this share of the narrower bin beside them. */
const ROUNDING_SHARE = 0.02;
/** Events that a fine column needs for its half-width to mean something. */
const FEWEST_FOR_WIDTH = 25;
/** Quantiles of one standard deviation either side of the middle of a normal distribution (central 68 %). */
const LOWER_QUANTILE = 0.15865525393145707;
const UPPER_QUANTILE = 1 - LOWER_QUANTILE;

/**
 * Edges of at most `bins` bins with equal numbers of events between `from` and `to`. A value that repeats so often
 * that it fills a bin by itself leaves fewer bins. Empty windows give even bins.
 */
export async function equalPopulation(
  countIn: CountIn,
  window: { from: number; to: number; spacing: 'linear' | 'log' },
  bins: number,
): Promise<number[]> {
  let fine = await look(countIn, evenly(window, Math.max(FIRST_LOOK, bins)));
  for (let i = 0; i < MOST_LOOKS; i++) {
    const closer = subdivided(fine, bins);
    if (!closer) break;
    fine = await look(countIn, closer);
  }
  const total = sum(fine.counts);
  if (total === 0) return [...evenly(window, bins)];
  return readable([window.from, ...populationEdges(fine, bins), window.to]);
}

/**
 * Edges of bins as wide as the local resolution times `factor`. `fine` is a fine tally `[columns, bins]` of true
 * values on `trueEdges` by reconstructed ones on `recoEdges`, both without their outer parts. The resolution is the
 * central 68 % half-width of the reconstructed values of a fine column; `of` tells on which axis the edges are wanted:
 * a reconstructed axis takes the width at the mean reconstructed value. Throws `RangeError` where no column has
 * `FEWEST_FOR_WIDTH` events.
 */
export function followResolution(
  fine: { events: Float64Array; trueEdges: Float64Array; recoEdges: Float64Array },
  of: 'true' | 'reconstructed',
  window: { from: number; to: number },
  factor: number,
  mostBins: number,
): number[] {
  const curve = resolutionCurve(fine, of);
  if (curve.length === 0) throw new RangeError('too few events in every part of the axis');
  const grid = evenly({ ...window, spacing: 'linear' }, FIRST_LOOK);
  // The number of bins passed up to each point of the grid: the integral of 1 / (factor * resolution).
  const passed = new Float64Array(grid.length);
  for (let i = 1; i < grid.length; i++) {
    const width = factor * widthAt(curve, (grid[i]! + grid[i - 1]!) / 2);
    passed[i] = passed[i - 1]! + (grid[i]! - grid[i - 1]!) / width;
  }
  const all = passed[passed.length - 1]!;
  const bins = Math.min(mostBins, Math.max(1, Math.round(all)));
  const inner = Array.from({ length: bins - 1 }, (_, i) => interpolate(passed, grid, (all * (i + 1)) / bins));
  return readable([window.from, ...inner, window.to]);
}

/** The central 68 % half-width of each fine column with events enough, at its middle (or mean reconstructed value). */
export function resolutionCurve(
  fine: { events: Float64Array; trueEdges: Float64Array; recoEdges: Float64Array },
  of: 'true' | 'reconstructed',
): { at: number; width: number }[] {
  const { events, trueEdges, recoEdges } = fine;
  const bins = recoEdges.length - 1;
  const curve: { at: number; width: number }[] = [];
  for (let j = 0; j + 1 < trueEdges.length; j++) {
    const counts = events.subarray(j * bins, (j + 1) * bins);
    if (sum(counts) < FEWEST_FOR_WIDTH) continue;
    const [low, middle, high] = quantiles({ edges: recoEdges, counts }, [LOWER_QUANTILE, 0.5, UPPER_QUANTILE]);
    const centre = (trueEdges[j]! + trueEdges[j + 1]!) / 2;
    curve.push({ at: of === 'true' ? centre : middle!, width: (high! - low!) / 2 });
  }
  return curve.sort((a, b) => a.at - b.at);
}

/**
 * Edges with every bin below `limit` effective entries (`W^2 / V`) merged into its thinner neighbour, the thinnest
 * first, until none is left or one bin remains. `weights` and `squares` are sums over the bins of `edges`; without
 * weights both are the numbers of events.
 */
export function mergeThin(
  edges: readonly number[],
  weights: readonly number[],
  squares: readonly number[],
  limit: number,
): number[] {
  const bins = weights.map((w, i) => ({ from: edges[i]!, w, v: squares[i]! }));
  const entries = ({ w, v }: { w: number; v: number }): number => (w > 0 && v > 0 ? w ** 2 / v : 0);
  while (bins.length > 1) {
    const sizes = bins.map(entries);
    const thinnest = sizes.indexOf(Math.min(...sizes));
    if (sizes[thinnest]! >= limit) break;
    const before = sizes[thinnest - 1] ?? Infinity;
    const after = sizes[thinnest + 1] ?? Infinity;
    const left = before <= after ? thinnest - 1 : thinnest;
    const [a, b] = bins.splice(left, 2) as [(typeof bins)[0], (typeof bins)[0]];
    bins.splice(left, 0, { from: a.from, w: a.w + b.w, v: a.v + b.v });
  }
  return [...bins.map(({ from }) => from), edges[edges.length - 1]!];
}

async function look(countIn: CountIn, edges: Float64Array): Promise<FineCounts> {
  return { edges, counts: await countIn(edges) };
}

function evenly(window: { from: number; to: number; spacing: 'linear' | 'log' }, bins: number): Float64Array {
  const { from, to, spacing } = window;
  const at = (share: number): number => (spacing === 'log' ? from * (to / from) ** share : from + share * (to - from));
  return Float64Array.from({ length: bins + 1 }, (_, i) => (i === 0 ? from : i === bins ? to : at(i / bins)));
}

/** The edges with every fine bin that holds a searched edge, and is too full, cut in pieces; `null` where none is. */
function subdivided(fine: FineCounts, bins: number): Float64Array | null {
  const { edges, counts } = fine;
  const share = sum(counts) / bins;
  const finer: number[] = [];
  let passed = 0;
  let cut = false;
  counts.forEach((count, i) => {
    finer.push(edges[i]!);
    const holdsEdge = Math.floor(passed / share) < Math.floor((passed + count) / share);
    const width = edges[i + 1]! - edges[i]!;
    const isWide = edges[i]! + width / PIECES > edges[i]! && edges[i]! + width * (1 - 1 / PIECES) < edges[i + 1]!;
    if (holdsEdge && count > FINE_ENOUGH * share && isWide) {
      cut = true;
      for (let p = 1; p < PIECES; p++) finer.push(edges[i]! + (width * p) / PIECES);
    }
    passed += count;
  });
  finer.push(edges[edges.length - 1]!);
  // Where numbers are so dense that pieces fall together, what can be told apart is kept.
  return cut ? Float64Array.from(finer.filter((edge, i) => i === 0 || edge > finer[i - 1]!)) : null;
}

/**
 * Inner edges of `bins` equally filled bins. Where the fine bin that holds an edge stays too full it is one repeated
 * value, or as good as one: the edge goes to the nearer side of it, amid what is empty there.
 */
function populationEdges(fine: FineCounts, bins: number): number[] {
  const { edges, counts } = fine;
  const passed = running(counts);
  const share = passed[counts.length]! / bins;
  return Array.from({ length: bins - 1 }, (_, i) => {
    const target = share * (i + 1);
    const at = before(passed, target);
    const inside = (target - passed[at]!) / counts[at]!;
    if (counts[at]! <= FINE_ENOUGH * share) return edges[at]! + inside * (edges[at + 1]! - edges[at]!);
    return amidEmpty(fine, inside < 0.5 ? at : at + 1);
  });
}

/** The middle of the empty stretch around fine edge `at`, or that edge where both its bins have events. */
function amidEmpty({ edges, counts }: FineCounts, at: number): number {
  let [from, to] = [at, at];
  while (from > 0 && counts[from - 1] === 0) from--;
  while (to < counts.length && counts[to] === 0) to++;
  return (edges[from]! + edges[to]!) / 2;
}

/** Values below which the given increasing shares of the counts lie, linear inside a fine bin. */
function quantiles({ edges, counts }: FineCounts, shares: readonly number[]): number[] {
  const passed = running(counts);
  const total = passed[counts.length]!;
  return shares.map((share) => interpolate(passed, edges, share * total));
}

/** Sums of all counts before each edge. */
function running(counts: Float64Array): Float64Array {
  const passed = new Float64Array(counts.length + 1);
  counts.forEach((count, i) => (passed[i + 1] = passed[i]! + count));
  return passed;
}

/** The interval of increasing (not strictly) `xs` that reaches `x` first. */
function before(xs: Float64Array, x: number): number {
  let lo = 0;
  let hi = xs.length - 1;
  while (hi - lo > 1) {
    const middle = (lo + hi) >> 1;
    if (xs[middle]! < x) lo = middle;
    else hi = middle;
  }
  return lo;
}

/** `y` at `x` for increasing (not strictly) `xs`, linear inside the first interval that reaches `x`. */
function interpolate(xs: Float64Array, ys: Float64Array, x: number): number {
  const i = before(xs, x);
  const step = xs[i + 1]! - xs[i]!;
  return step > 0 ? ys[i]! + ((x - xs[i]!) / step) * (ys[i + 1]! - ys[i]!) : ys[i]!;
}

function widthAt(curve: readonly { at: number; width: number }[], x: number): number {
  const after = curve.findIndex(({ at }) => at >= x);
  if (after < 0) return curve[curve.length - 1]!.width;
  if (after === 0) return curve[0]!.width;
  const [a, b] = [curve[after - 1]!, curve[after]!];
  return a.width + ((x - a.at) / (b.at - a.at)) * (b.width - a.width);
}

/** Inner edges rounded so that no bin changes by more than about `ROUNDING_SHARE` of its width; equal ones dropped. */
function readable(edges: readonly number[]): number[] {
  const last = edges[edges.length - 1]!;
  const out = [edges[0]!];
  for (let i = 1; i + 1 < edges.length; i++) {
    const narrower = Math.min(edges[i]! - out[out.length - 1]!, edges[i + 1]! - edges[i]!);
    const edge = narrower > 0 ? rounded(edges[i]!, ROUNDING_SHARE * narrower) : edges[i]!;
    if (edge > out[out.length - 1]! && edge < last) out.push(edge);
  }
  return [...out, last];
}

/** `x` rounded to a multiple of the greatest power of ten that is at most `step`. */
function rounded(x: number, step: number): number {
  const decimals = -Math.floor(Math.log10(step));
  // `toFixed` knows up to 100 decimals: beyond these, and for whole tens, the power itself is used.
  if (decimals >= 0 && decimals <= 100) return Number(x.toFixed(decimals));
  const power = 10 ** -decimals;
  return power > 0 ? Math.round(x / power) * power : x;
}

function sum(values: Float64Array): number {
  return values.reduce((a, b) => a + b, 0);
}
