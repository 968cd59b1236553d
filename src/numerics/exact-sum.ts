/** Partial sums a cell has room for at first: sums of weights of like size need two or three. */
const FIRST_STRIDE = 3;

/**
 * Exact sums of doubles, one a cell. Each is held as an expansion of partial sums that do not overlap, increasing in
 * magnitude, whose exact sum is the sum of everything added (Shewchuk, Discrete & Computational Geometry 18 (1997)
 * 305). Values therefore do not depend on the order of the additions or on how they were split.
 * Sums must stay finite: the caller keeps out NaN, infinities and magnitudes near the largest double.
 */
export class ExactSums {
  private stride = FIRST_STRIDE;
  private partials: Float64Array;
  private counts: Uint8Array;

  constructor(readonly cells: number) {
    this.partials = new Float64Array(cells * this.stride);
    this.counts = new Uint8Array(cells);
  }

  /** Adds `x` to a cell, without any rounding. */
  add(cell: number, x: number): void {
    const { partials } = this;
    const base = cell * this.stride;
    const count = this.counts[cell]!;
    let kept = 0;
    for (let i = 0; i < count; i++) {
      const y = partials[base + i]!;
      const sum = x + y;
      const shift = sum - x;
      const lost = x - (sum - shift) + (y - shift);
      if (lost !== 0) partials[base + kept++] = lost;
      x = sum;
    }
    if (x !== 0) {
      if (kept === this.stride) this.widen();
      this.partials[cell * this.stride + kept++] = x;
    }
    this.counts[cell] = kept;
  }

  /** Adds the exact sum of a cell of `other`. */
  addFrom(cell: number, other: ExactSums, otherCell: number): void {
    const base = otherCell * other.stride;
    for (let i = 0; i < other.counts[otherCell]!; i++) this.add(cell, other.partials[base + i]!);
  }

  /** Adds every cell of `other`, which has as many. */
  merge(other: ExactSums): void {
    for (let cell = 0; cell < this.cells; cell++) this.addFrom(cell, other, cell);
  }

  /** The sum of a cell, correctly rounded (half to even). */
  value(cell: number): number {
    const base = cell * this.stride;
    return roundExpansion(this.partials.subarray(base, base + this.counts[cell]!));
  }

  /** The sums of all cells, correctly rounded. */
  values(): Float64Array {
    return Float64Array.from({ length: this.cells }, (_, cell) => this.value(cell));
  }

  /** The expansions as they stand, `[cells, stride]`: for a message to another thread. The arrays are this object's own. */
  toParts(): { stride: number; partials: Float64Array } {
    const { stride, partials, counts } = this;
    for (let cell = 0; cell < this.cells; cell++) {
      partials.fill(0, cell * stride + counts[cell]!, (cell + 1) * stride);
    }
    return { stride, partials };
  }

  /**
   * The expansions as `[cells, stride]`, each the rounded sum, then the rounded rest, and so on to nothing: there is
   * only one such expansion of a number, so equal sums give equal bytes.
   */
  canonicalParts(): { stride: number; partials: Float64Array } {
    const expansions = Array.from({ length: this.cells }, (_, cell) => this.canonical(cell));
    const stride = expansions.reduce((most, { length }) => Math.max(most, length), 1);
    const partials = new Float64Array(this.cells * stride);
    expansions.forEach((expansion, cell) => partials.set(expansion, cell * stride));
    return { stride, partials };
  }

  static fromParts({ stride, partials }: { stride: number; partials: Float64Array }): ExactSums {
    const sums = new ExactSums(partials.length / stride);
    partials.forEach((x, i) => {
      if (x !== 0) sums.add(Math.floor(i / stride), x);
    });
    return sums;
  }

  private canonical(cell: number): number[] {
    if (this.counts[cell]! < 2)
      return [...this.partials.subarray(cell * this.stride, cell * this.stride + this.counts[cell]!)];
    const rest = new ExactSums(1);
    rest.addFrom(0, this, cell);
    const expansion: number[] = [];
    for (let head = rest.value(0); head !== 0; head = rest.value(0)) {
      expansion.push(head);
      rest.add(0, -head);
    }
    return expansion;
  }

  private widen(): void {
    const stride = this.stride + 2;
    const partials = new Float64Array(this.cells * stride);
    for (let cell = 0; cell < this.cells; cell++) {
      partials.set(this.partials.subarray(cell * this.stride, (cell + 1) * this.stride), cell * stride);
    }
    this.partials = partials;
    this.stride = stride;
  }
}

/** The exact sum of partial sums that do not overlap, increasing in magnitude, rounded once, half to even. */
function roundExpansion(partials: Float64Array): number {
  let i = partials.length - 1;
  if (i < 0) return 0;
  let sum = partials[i]!;
  let rest = 0;
  while (i > 0 && rest === 0) {
    const x = sum;
    const y = partials[--i]!;
    sum = x + y;
    rest = y - (sum - x);
  }
  // What is left below decides only where the rest is exactly half a unit in the last place.
  if (i > 0 && rest !== 0 && Math.sign(rest) === Math.sign(partials[i - 1]!)) {
    const doubled = 2 * rest;
    const up = sum + doubled;
    if (up - sum === doubled) return up;
  }
  return sum;
}
