import { MOST_LABELS, type ColumnFacts } from './batch';
import { isMissing, parseNumber } from './number';
import { Dictionary } from './dictionary';
import { jsonNumber } from './object-parser';

/** Counts what one column holds: missing and non-finite values, range, labels. */
export class Census {
  private missing = 0;
  private nonFinite = 0;
  private least = Infinity;
  private greatest = -Infinity;
  private isNumber: boolean;
  private labels: Dictionary | null;

  /** `type` where the format knows it; else the column is a number as long as every value is one. */
  constructor(
    private readonly name: string,
    type: 'number' | 'text' | 'unknown' = 'unknown',
  ) {
    this.isNumber = type !== 'text';
    this.labels = type === 'number' ? null : new Dictionary('', name);
  }

  /** Counts the value written in `bytes[from, to)`. */
  add(bytes: Uint8Array, from: number, to: number): void {
    if (isMissing(bytes, from, to)) {
      this.missing += 1;
      return;
    }
    this.addLabel(bytes, from, to);
    if (!this.isNumber) return;
    const value = parseNumber(bytes, from, to);
    if (value !== value) this.isNumber = false;
    else this.addFinite(value);
  }

  /** Counts a value of JSON. */
  addJson(value: unknown): void {
    const number = jsonNumber(value);
    if (number !== number) this.missing += 1;
    else {
      if (this.labels !== null && typeof value === 'object') this.labels = null;
      if (this.labels !== null) this.keep(this.labels.codeOfText(String(value)));
      if (number === null) this.isNumber = false;
      else this.addFinite(number);
    }
  }

  /** Counts a number; `NaN` is missing. */
  addNumber(value: number): void {
    if (value !== value) this.missing += 1;
    else this.addFinite(value);
  }

  facts(): ColumnFacts {
    const { name, missing, isNumber, nonFinite, least, greatest, labels } = this;
    if (!isNumber) return { ...textFacts(name, missing), labels: labels && [...labels.labels].sort() };
    const any = least <= greatest;
    const range = { least: any ? least : null, greatest: any ? greatest : null };
    return { name, type: 'number', missing, nonFinite, ...range, labels: null };
  }

  private addFinite(value: number): void {
    if (value - value !== 0) this.nonFinite += 1;
    else {
      if (value < this.least) this.least = value;
      if (value > this.greatest) this.greatest = value;
    }
  }

  private addLabel(bytes: Uint8Array, from: number, to: number): void {
    if (this.labels !== null) this.keep(this.labels.code(bytes, from, to));
  }

  private keep(code: number): void {
    if (code >= MOST_LABELS) this.labels = null;
  }
}

/** Facts of a text column, its labels still to be told. */
export function textFacts(name: string, missing: number): ColumnFacts {
  return { name, type: 'text', missing, nonFinite: 0, least: null, greatest: null, labels: null };
}
