import { ExactSums } from '../numerics/exact-sum';
import type { Cells } from './tally';

/** `CellSums` as plain arrays, for a worker's message or a file. */
export interface PlainCellSums {
  events: Float64Array;
  weights: { stride: number; partials: Float64Array } | null;
  squares: { stride: number; partials: Float64Array } | null;
}

/**
 * Growing sums of cells: events, weights, squared weights. Weights are summed exactly, so that sums do not depend on
 * the order of the events or on how they were split.
 */
export class CellSums {
  private constructor(
    readonly events: Float64Array,
    readonly weights: ExactSums | null,
    readonly squares: ExactSums | null,
  ) {}

  static empty(cells: number, weighted: boolean): CellSums {
    const sums = () => (weighted ? new ExactSums(cells) : null);
    return new CellSums(new Float64Array(cells), sums(), sums());
  }

  static fromPlain({ events, weights, squares }: PlainCellSums): CellSums {
    return new CellSums(events, weights && ExactSums.fromParts(weights), squares && ExactSums.fromParts(squares));
  }

  /** One event of weight `w` (1 where unweighted). */
  add(cell: number, w: number): void {
    this.events[cell]!++;
    if (!this.weights) return;
    this.weights.add(cell, w);
    this.squares!.add(cell, w * w);
  }

  merge(other: CellSums): void {
    for (let i = 0; i < this.events.length; i++) this.events[i]! += other.events[i]!;
    if (other.weights) this.weights!.merge(other.weights);
    if (other.squares) this.squares!.merge(other.squares);
  }

  /**
   * The sums of a coarser set of cells: `cellOf(i)` is where cell `i` goes. Exact, like the sums themselves.
   */
  gather(cells: number, cellOf: (i: number) => number): CellSums {
    const into = CellSums.empty(cells, this.weights !== null);
    for (let i = 0; i < this.events.length; i++) {
      into.events[cellOf(i)]! += this.events[i]!;
      if (!this.weights) continue;
      into.weights!.addFrom(cellOf(i), this.weights, i);
      into.squares!.addFrom(cellOf(i), this.squares!, i);
    }
    return into;
  }

  /** The sums correctly rounded. */
  finish(): Cells {
    return {
      events: this.events.slice(),
      weights: this.weights?.values() ?? null,
      squares: this.squares?.values() ?? null,
    };
  }

  /** As plain arrays. Canonical ones are equal to the byte where the sums are equal. */
  toPlain(canonical: boolean): PlainCellSums {
    const plain = (sums: ExactSums | null) => sums && (canonical ? sums.canonicalParts() : sums.toParts());
    return { events: this.events, weights: plain(this.weights), squares: plain(this.squares) };
  }
}
