/** Replicas of one matrix that have come, and those that were asked for. The oldest make room for new ones. */
export class ReplicaCache {
  readonly #values = new Map<number, Float64Array>();
  readonly #asked = new Set<number>();

  constructor(
    /** Values of one replica. */
    readonly cells: number,
    /** Replicas kept at most. */
    readonly most: number,
  ) {}

  get(index: number): Float64Array | null {
    return this.#values.get(index) ?? null;
  }

  /** Those of `[from, to)` that nobody asked for yet; they count as asked for from now on. */
  ask(from: number, to: number): number[] {
    const fresh: number[] = [];
    for (let i = from; i < to; i++) if (!this.#asked.has(i)) fresh.push(i);
    fresh.forEach((i) => this.#asked.add(i));
    return fresh;
  }

  /** Whether a replica has come or is on its way. */
  knows(index: number): boolean {
    return this.#asked.has(index);
  }

  /** Takes in `[indices, cells]` values. */
  keep(indices: readonly number[], values: Float64Array): void {
    indices.forEach((index, i) => this.#values.set(index, values.subarray(i * this.cells, (i + 1) * this.cells)));
    for (const index of this.#values.keys()) {
      if (this.#values.size <= this.most) break;
      this.forget(index);
    }
  }

  /** A call for it failed, or its place is needed: it can be asked for again. */
  forget(index: number): void {
    this.#values.delete(index);
    this.#asked.delete(index);
  }
}
