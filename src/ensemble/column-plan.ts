import { checkShape, offsetOf, slopeOf } from '../numerics/gamma-variate';
import { Room } from '../numerics/ziggurat';

/**
 * A column is drawn as it stands where a cell of at least this shape and relative scale keeps its total from underflowing, else
 * in logarithms. `P(Gamma(a) < x) < x^a / Gamma(a + 1)` is below 1.1e-20 at `a = 0.1`, `x = 1e-200`: totals stay above 1e-250.
 */
export const ANCHOR_SHAPE = 0.1;
export const ANCHOR_SCALE = 1e-50;

/** Scales of equal weights differ by the rounding of two sums and a quotient, at most `6 * 2^-53`: they count as equal. */
export const EQUAL_SCALES = 2 ** -50;

/** Where the replicas of all columns of an ensemble are drawn before they are normalised. */
export class Workspace {
  readonly variates: Float64Array;
  readonly exponentials: Float64Array;
  readonly room: Room;

  constructor(outcomes: number) {
    this.variates = new Float64Array(outcomes);
    this.exponentials = new Float64Array(outcomes);
    this.room = new Room(outcomes);
  }
}

/** What can be computed once for all replicas of a column. The cells are those of shape above 0, ordered by kind. */
export interface ColumnPlan {
  outcomes: number;
  cells: Int32Array;
  shape: Float64Array;
  /** Relative to the largest; `null` where all are equal and cancel. */
  scale: Float64Array | null;
  /** Whether the total could underflow. */
  inLogs: boolean;
  /** Views of the workspace: all cells; those of shape 1/2, of shape 1, of other shapes; of the others those below 1. */
  variates: Float64Array;
  halves: Float64Array;
  ones: Float64Array;
  others: Float64Array;
  below: Float64Array;
  exponentials: Float64Array;
  room: Room;
  /** Marsaglia and Tsang's constants of `others`, and the reciprocal shapes of `below`. */
  offset: Float64Array;
  slope: Float64Array;
  reciprocal: Float64Array;
}

/**
 * Plans the column of the given gamma shapes and scales, `[outcome]`, at least one shape above 0.
 * Throws `RangeError` where `checkShape` does, and for a scale that is not above 0 and finite.
 */
export function planColumn(shapes: Float64Array, scales: Float64Array | null, work: Workspace): ColumnPlan {
  shapes.forEach(checkShape);
  const groups: number[][] = [[], [], [], []];
  shapes.forEach((a, k) => a > 0 && groups[kindOf(a)]!.push(k));
  const [halves, ones, above, below] = groups.map((group) => group.length) as [number, number, number, number];
  const cells = Int32Array.from(groups.flat());
  const shape = Float64Array.from(cells, (k) => shapes[k]!);
  const scale = scales && relativeScales(Float64Array.from(cells, (k) => scales[k]!));
  const others = shape.subarray(halves + ones);
  return {
    outcomes: shapes.length,
    cells,
    shape,
    scale,
    inLogs: !shape.some((a, i) => a >= ANCHOR_SHAPE && (scale === null || scale[i]! >= ANCHOR_SCALE)),
    variates: work.variates.subarray(0, cells.length),
    halves: work.variates.subarray(0, halves),
    ones: work.variates.subarray(halves, halves + ones),
    others: work.variates.subarray(halves + ones, cells.length),
    below: work.variates.subarray(halves + ones + above, cells.length),
    exponentials: work.exponentials.subarray(0, below),
    room: work.room,
    offset: others.map(offsetOf),
    slope: others.map(slopeOf),
    reciprocal: others.subarray(above).map((a) => 1 / a),
  };
}

/** Shapes of 1/2, of 1, above and below are drawn in different ways. */
function kindOf(shape: number): 0 | 1 | 2 | 3 {
  if (shape === 0.5) return 0;
  if (shape === 1) return 1;
  return shape > 1 ? 2 : 3;
}

function relativeScales(scales: Float64Array): Float64Array | null {
  const bad = scales.find((s) => !(s > 0 && s < Infinity));
  if (bad !== undefined) throw new RangeError(`a gamma scale must be above 0 and finite, not ${bad}`);
  const most = scales.reduce((a, b) => Math.max(a, b));
  const least = scales.reduce((a, b) => Math.min(a, b));
  return least >= most * (1 - EQUAL_SCALES) ? null : scales.map((s) => s / most);
}
