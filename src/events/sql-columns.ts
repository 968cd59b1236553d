import { InputError } from '../study/input-error';
import type { Need } from './batch';

/** How a need is asked of DuckDB: as doubles, as texts, or both (see `Slab`), each an expression. */
export interface Asked {
  numbers: string | null;
  text: string | null;
}

const WHOLE = /^U?(TINYINT|SMALLINT|INTEGER)$/;
const LONG = /^(U?BIGINT|U?HUGEINT)$/;
const REAL = /^(FLOAT|DOUBLE)$/;
const DECIMAL = /^DECIMAL\((\d+),(\d+)\)$/;
const TEXT = /^(VARCHAR|UUID|ENUM\(.*\))$/;
const NESTED = /^(STRUCT|MAP|UNION|BLOB|BIT|GEOMETRY|VARIANT)|\]$/;
/** The largest integer of 15 digits: up to it a double is exact and its text has no exponent (see `identity.ts`). */
const LARGEST = '999999999999999';
/** Up to so many digits a decimal and its power of ten are exact doubles, and their quotient is the nearest double. */
const EXACT_DIGITS = 15;

/** What a column of this SQL type holds. Dates and times are `unknown`: labels if a study wants them so, no numbers. */
export function kindOf(type: string): 'number' | 'text' | 'unknown' {
  if (type === 'BOOLEAN' || [WHOLE, LONG, REAL, DECIMAL].some((kind) => kind.test(type))) return 'number';
  return TEXT.test(type) ? 'text' : 'unknown';
}

/**
 * The expressions for a need over the column `c` of an SQL type. Missing values become `NaN` and the empty text there, so
 * that no validity bits need be looked at. Throws `InputError` for a type that cannot serve; `file` names the file.
 */
export function ask({ as, column }: Need, type: string, c: string, file: string): Asked {
  const kind = kindOf(type);
  if (NESTED.test(type) || (as === 'number' && kind === 'unknown')) {
    const remedy = `choose a column of ${as === 'number' ? 'numbers' : 'single values'}`;
    throw new InputError(file, `column "${column}" holds ${type}`, remedy);
  }
  const numbers = `coalesce(CAST(${c} AS DOUBLE), 'NaN'::DOUBLE)`;
  const text = `coalesce(CAST(${c} AS VARCHAR), '')`;
  const digits = Number(DECIMAL.exec(type)?.[1] ?? 0);
  const asText = kind !== 'number' || (as === 'number' ? digits > EXACT_DIGITS : digits > 0 || type === 'BOOLEAN');
  if (asText) return { numbers: null, text };
  if (as === 'number' || !LONG.test(type)) return { numbers, text: null };
  const short = type.startsWith('U') ? `${c} <= ${LARGEST}` : `${c} BETWEEN -${LARGEST} AND ${LARGEST}`;
  return {
    numbers: `CASE WHEN ${short} THEN CAST(${c} AS DOUBLE) ELSE 'NaN'::DOUBLE END`,
    text: `CASE WHEN ${short} THEN '' ELSE ${text} END`,
  };
}
