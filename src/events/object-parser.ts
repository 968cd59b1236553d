import type { Need } from './batch';
import type { BatchBuilder } from './batch-builder';
import { identifyNumber, identifyText } from './identity';
import { LONGEST_LINE } from './lines';
import { numberOf } from './number';

const LINE_FEED = 10;

export type JsonObject = Record<string, unknown>;

/** Turns lines of one JSON object each into rows of a batch. A key that is absent or `null` is a missing value. */
export class ObjectParser {
  place = 0;

  constructor(
    private readonly needs: readonly Need[],
    private readonly builder: BatchBuilder,
  ) {}

  parse(bytes: Uint8Array, from: number, to: number): number {
    let line = from;
    while (line < to && !this.builder.full) {
      const feed = bytes.indexOf(LINE_FEED, line);
      this.place += 1;
      const parsed = parseObject(bytes, line, feed);
      if (typeof parsed === 'object') this.addRow(parsed.object, parsed.text);
      else if (parsed !== 'blank') {
        this.builder.reject(this.place, null, textOf(bytes, line, Math.min(feed, line + LONGEST_EXCERPT)), parsed);
      }
      line = feed + 1;
    }
    return line;
  }

  private addRow(object: JsonObject, line: string): void {
    const { builder, needs, place } = this;
    for (let i = 0; i < needs.length; i++) {
      const { column, as } = needs[i];
      const value = Object.hasOwn(object, column) ? object[column] : null;
      if (!this.fill(i, as, value, line)) {
        builder.reject(place, column, JSON.stringify(value), as === 'number' ? 'not a number' : 'not a single value');
        return;
      }
    }
    builder.places[builder.rows++] = place;
  }

  /** Writes one value; false where it cannot serve. */
  private fill(i: number, as: Need['as'], value: unknown, line: string): boolean {
    const { builder } = this;
    const { rows } = builder;
    if (as === 'number') {
      const number = jsonNumber(value);
      if (number === null) return false;
      builder.numbers[i][rows] = number;
      return true;
    }
    if (typeof value === 'object' && value !== null) return false;
    if (as === 'identity' && typeof value === 'boolean')
      identifyNumber(Number(value), builder.high[i], builder.low[i], rows);
    else {
      const text = value === null ? '' : asWritten(value, this.needs[i].column, line);
      if (as === 'identity') identifyText(text, builder.high[i], builder.low[i], rows);
      else builder.codes[i][rows] = builder.dictionaries[i].codeOfText(text);
    }
    return true;
  }
}

const LONGEST_EXCERPT = 100;

/** The object on one line, with the line's text; or why there is none. */
export function parseObject(
  bytes: Uint8Array,
  from: number,
  to: number,
): { object: JsonObject; text: string } | string {
  if (to - from > LONGEST_LINE) return 'line too long';
  const text = textOf(bytes, from, to);
  if (text.trim() === '') return 'blank';
  try {
    const object: unknown = JSON.parse(text);
    if (typeof object !== 'object' || object === null || Array.isArray(object)) return 'not a JSON object';
    return { object: object as JsonObject, text };
  } catch {
    return 'not JSON';
  }
}

/** The number a JSON value stands for: itself, a boolean as 0 or 1, a text that holds one; `NaN` is missing, `null` none. */
export function jsonNumber(value: unknown): number | null {
  if (typeof value === 'number') return value;
  if (value === null) return NaN;
  if (typeof value === 'boolean') return value ? 1 : 0;
  return typeof value === 'string' ? numberOf(value) : null;
}

/**
 * A value as a label or identity. `JSON.parse` rounds integers beyond 2^53, which would join different identities: those
 * are looked up as they are written. (A key of that name inside a nested object could be taken instead; only if it holds
 * a number that rounds to the same.)
 */
function asWritten(value: unknown, column: string, line: string): string {
  if (typeof value !== 'number' || Math.abs(value) <= Number.MAX_SAFE_INTEGER) return String(value);
  const key = JSON.stringify(column).replace(/[.*+?^${}()|[\]\\]/g, '\\$&');
  for (const [, written] of line.matchAll(new RegExp(`${key}\\s*:\\s*(-?\\d+)(?![\\d.eE])`, 'g'))) {
    if (Number(written) === value) return written;
  }
  return String(value);
}

const utf8 = new TextDecoder();

function textOf(bytes: Uint8Array, from: number, to: number): string {
  return utf8.decode(bytes.subarray(from, to));
}
