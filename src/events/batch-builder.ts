import type { Batch, Column, Need, Reject } from './batch';
import { Dictionary } from './dictionary';

/** Rows of a full batch, and most rejects of one: enough to make a batch's overhead vanish, few enough for the cache. */
export const BATCH_ROWS = 16_384;

/** Longest piece of a bad value that a reject repeats. */
const LONGEST_VALUE = 80;

/**
 * Gathers the rows of one unit into batches. A reader writes the values of row `rows` into `numbers`, `codes`, or `high`
 * and `low` at the index of the need, sets its place, and then adds one to `rows`: a row half written and given up costs
 * nothing. The arrays of a batch are used again for the next one.
 */
export class BatchBuilder {
  rows = 0;
  places!: Float64Array;
  /** By the index of the need; empty arrays for needs of another kind. */
  numbers: Float64Array[] = [];
  codes: Int32Array[] = [];
  high: Uint32Array[] = [];
  low: Uint32Array[] = [];
  readonly dictionaries: Dictionary[];
  private rejects: Reject[] = [];

  /** `file` names the file in errors. */
  constructor(
    private readonly needs: readonly Need[],
    file: string,
    readonly capacity = BATCH_ROWS,
  ) {
    this.dictionaries = needs.map(({ column }) => new Dictionary(file, column));
    this.allocate();
  }

  /** True where no further row or reject has room. */
  get full(): boolean {
    return this.rows >= this.capacity || this.rejects.length >= this.capacity;
  }

  reject(place: number, column: string | null, value: string | null, reason: string): void {
    const short = value !== null && value.length > LONGEST_VALUE ? `${value.slice(0, LONGEST_VALUE)}...` : value;
    this.rejects.push({ place, column, value: short, reason });
  }

  /** Takes back those of the last `count` rows that are bad, by their index in the batch, and rejects each. */
  withdraw(count: number, bad: ReadonlyMap<number, { column: string; value: string }>, reason: string): void {
    const arrays = [this.places, ...this.numbers, ...this.codes, ...this.high, ...this.low];
    let kept = this.rows - count;
    for (let row = kept; row < this.rows; row++) {
      const fault = bad.get(row);
      if (fault) this.reject(this.places[row], fault.column, fault.value, reason);
      else {
        for (const array of arrays) if (array.length > 0) array[kept] = array[row];
        kept += 1;
      }
    }
    this.rows = kept;
  }

  /** Hands on what was gathered and starts anew. */
  take(bytes: number, placesPassed: number): Batch {
    const { rows, rejects } = this;
    const columns = this.needs.map((need, i) => this.column(need, i, rows));
    const batch = { rows, places: this.places.subarray(0, rows), columns, rejects, bytes, placesPassed };
    this.rows = 0;
    this.rejects = [];
    return batch;
  }

  private column({ as }: Need, i: number, rows: number): Column {
    if (as === 'number') return { as, values: this.numbers[i].subarray(0, rows) };
    if (as === 'text') return { as, codes: this.codes[i].subarray(0, rows), labels: this.dictionaries[i].labels };
    return { as, high: this.high[i].subarray(0, rows), low: this.low[i].subarray(0, rows) };
  }

  private allocate(): void {
    const lengthFor = (i: number, as: Need['as']) => (this.needs[i].as === as ? this.capacity : 0);
    this.places = new Float64Array(this.capacity);
    this.numbers = this.needs.map((_, i) => new Float64Array(lengthFor(i, 'number')));
    this.codes = this.needs.map((_, i) => new Int32Array(lengthFor(i, 'text')));
    this.high = this.needs.map((_, i) => new Uint32Array(lengthFor(i, 'identity')));
    this.low = this.needs.map((_, i) => new Uint32Array(lengthFor(i, 'identity')));
  }
}
