import { MOST_LABELS, type ColumnFacts } from './batch';
import { isMissing, parseNumber } from './number';
import { Dictionary } from './dictionary';
import { jsonNumber } from './object-parser';

/** A few bad values do not make a column of numbers one of texts: they are rows to be rejected. */
export const MOST_MALFORMED = 0.05;

/** Counts what one column holds: missing and non-finite values, range, labels. */
export class Census {
  private missing = 0;
  private nonFinite = 0;
  private least = Infinity;
  private greatest = -Infinity;
  private numbers = 0;
  private malformed = 0;
  private readonly mayBeNumber: boolean;
  private labels: Dictionary | null;

  /** `type` where the format knows it; else the column is one of numbers where nearly every value is. */
  constructor(
    private readonly name: string,
    type: 'number' | 'text' | 'unknown' = 'unknown',
  ) {
    this.mayBeNumber = type !== 'text';
    this.labels = type === 'number' ? null : new Dictionary('', name);
  }

  /** Counts the value written in `bytes[from, to)`. */
  add(bytes: Uint8Array, from: number, to: number): void {
    if (isMissing(bytes, from, to)) {
      this.missing += 1;
      return;
    }
    this.addLabel(bytes, from, to);
    if (!this.mayBeNumber) return;
    const value = parseNumber(bytes, from, to);
    if (value !== value) this.malformed += 1;
    else this.addNumeric(value);
  }

  /** Whether only numbers matter: it may be a column of numbers, and its labels are too many to be told. */
  get countsNumbers(): boolean {
    return this.mayBeNumber && this.labels === null;
  }

  /** Counts a value of JSON. */
  addJson(value: unknown): void {
    const number = jsonNumber(value);
    if (number !== number) this.missing += 1;
    else {
      if (this.labels !== null && typeof value === 'object') this.labels = null;
      if (this.labels !== null) this.keep(this.labels.codeOfText(String(value)));
      if (number === null) this.malformed += 1;
      else this.addNumeric(number);
    }
  }

  /** Counts a number; `NaN` is missing. */
  addNumber(value: number): void {
    if (value !== value) this.missing += 1;
    else this.addNumeric(value);
  }

  facts(): ColumnFacts {
    const { name, missing, malformed, nonFinite, least, greatest, labels } = this;
    if (!this.isNumber()) return { ...textFacts(name, missing), labels: labels && [...labels.labels].sort() };
    const any = least <= greatest;
    const range = { least: any ? least : null, greatest: any ? greatest : null };
    return { name, type: 'number', missing, malformed, nonFinite, ...range, labels: null };
  }

  /** A column of a format that knows no types, and one without values, is a number as long as nothing speaks against it. */
  private isNumber(): boolean {
    return this.mayBeNumber && this.malformed <= MOST_MALFORMED * (this.numbers + this.malformed);
  }

  private addNumeric(value: number): void {
    this.numbers += 1;
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
  return { name, type: 'text', missing, malformed: 0, nonFinite: 0, least: null, greatest: null, labels: null };
}
