import type { Need } from './batch';
import type { BatchBuilder } from './batch-builder';
import { identifyNumber, identifyText } from './identity';
import { numberOf } from './number';

/**
 * The values of one need in a stretch of rows, as a binary format holds them: numbers, or texts, or numbers with texts
 * for those that no double holds exactly. Missing is `NaN`, and where there are texts, the empty one.
 */
export interface Slab {
  numbers: ArrayLike<number> | null;
  /** Asked only where `numbers` is absent or `NaN`. */
  text: ((row: number) => string) | null;
}

/** From here on an integer has 16 digits: a label or identity is then made of its exact text (see `identity.ts`). */
const LONG_INTEGER = 1e15;

/** The slab of 64-bit integers: for a number the nearest doubles, else exact. */
export function integerSlab(values: BigInt64Array | BigUint64Array, as: Need['as']): Slab {
  const numbers = Float64Array.from(values as BigInt64Array, Number);
  if (as === 'number') return { numbers, text: null };
  for (let i = 0; i < numbers.length; i++) if (Math.abs(numbers[i]) >= LONG_INTEGER) numbers[i] = NaN;
  return { numbers, text: (row) => String(values[row]) };
}

/** Takes slabs into batches. A text that should be a number and is none rejects its row. */
export class SlabTaker {
  /** Codes of numbers met as labels: their text is made once. */
  private readonly codes: Map<number, number>[];
  private bad = new Map<number, { column: string; value: string }>();

  constructor(
    private readonly needs: readonly Need[],
    private readonly builder: BatchBuilder,
  ) {
    this.codes = needs.map(() => new Map());
  }

  /** How many rows the batch has room for. */
  get room(): number {
    return this.builder.capacity - this.builder.rows;
  }

  /** Takes rows `[from, to)` of one slab a need; the first has the place `place`. There must be room for them. */
  take(slabs: readonly Slab[], from: number, to: number, place: number): void {
    const { builder, needs } = this;
    needs.forEach(({ as }, i) => {
      if (as === 'number') this.takeNumbers(i, slabs[i], from, to);
      else if (as === 'text') this.takeLabels(i, slabs[i], from, to);
      else this.takeIdentities(i, slabs[i], from, to);
    });
    for (let i = 0; i < to - from; i++) builder.places[builder.rows + i] = place + i;
    builder.rows += to - from;
    if (this.bad.size > 0) {
      builder.withdraw(to - from, this.bad, 'not a number');
      this.bad = new Map();
    }
  }

  private takeNumbers(i: number, { numbers, text }: Slab, from: number, to: number): void {
    const { builder, needs, bad } = this;
    const into = builder.numbers[i];
    const shift = builder.rows - from;
    if (numbers instanceof Float64Array && text === null) {
      into.set(numbers.subarray(from, to), builder.rows);
      return;
    }
    for (let k = from; k < to; k++) {
      const number = numbers ? numbers[k] : NaN;
      if (number === number || text === null) into[k + shift] = number;
      else {
        const value = numberOf(text(k));
        if (value === null) bad.set(k + shift, { column: needs[i].column, value: text(k) });
        else into[k + shift] = value;
      }
    }
  }

  private takeLabels(i: number, { numbers, text }: Slab, from: number, to: number): void {
    const { builder } = this;
    const into = builder.codes[i];
    const shift = builder.rows - from;
    for (let k = from; k < to; k++) {
      const number = numbers ? numbers[k] : NaN;
      if (number === number) into[k + shift] = this.codeOfNumber(i, number);
      else into[k + shift] = builder.dictionaries[i].codeOfText(text === null ? '' : text(k));
    }
  }

  private codeOfNumber(i: number, number: number): number {
    const known = this.codes[i].get(number);
    if (known !== undefined) return known;
    const code = this.builder.dictionaries[i].codeOfText(String(number));
    this.codes[i].set(number, code);
    return code;
  }

  private takeIdentities(i: number, { numbers, text }: Slab, from: number, to: number): void {
    const { builder } = this;
    const high = builder.high[i];
    const low = builder.low[i];
    const shift = builder.rows - from;
    for (let k = from; k < to; k++) {
      const number = numbers ? numbers[k] : NaN;
      if (number === number || text === null) identifyNumber(number, high, low, k + shift);
      else identifyText(text(k), high, low, k + shift);
    }
  }
}
