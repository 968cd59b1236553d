/**
 * What every reader of event files hands on: batches of typed arrays, one entry a row, in the order of the file.
 * Rows that cannot be read are not in the arrays; they stand in `rejects`, each with its place.
 */

/** A column that a study needs, and as what: a number, a label (text), or an event identity. */
export interface Need {
  column: string;
  as: 'number' | 'text' | 'identity';
}

/** `NaN` stands for a missing value (`NULL`, empty, `NaN`, `nan`). Infinities stay what they are. */
export interface NumberColumn {
  as: 'number';
  values: Float64Array;
}

/** Labels as codes into `labels`; -1 is missing. `labels` only grows over the batches of one unit. */
export interface TextColumn {
  as: 'text';
  codes: Int32Array;
  labels: readonly string[];
}

/**
 * Identities as 64-bit keys, `high` and `low` words; both 0 is missing. A decimal integer of at most 15 digits has
 * the same key in every format; any other text is hashed. See `identity.ts`.
 */
export interface IdentityColumn {
  as: 'identity';
  high: Uint32Array;
  low: Uint32Array;
}

export type Column = NumberColumn | TextColumn | IdentityColumn;

/** A row that could not be read. `place` is the physical line (or row number), counted from 1 at the unit's start. */
export interface Reject {
  place: number;
  column: string | null;
  value: string | null;
  reason: string;
}

/** Its arrays may be used again once the next batch is asked for: whoever keeps values copies them. */
export interface Batch {
  rows: number;
  /** Physical line (or row number) of each row, counted from 1 at the start of the unit. */
  places: Float64Array;
  /** One column a need, in the order of the needs. */
  columns: Column[];
  rejects: Reject[];
  /** Bytes of the file consumed since the batch before, for progress. */
  bytes: number;
  /** Lines (or rows) passed since the unit's start, rejected, blank and header lines included. */
  placesPassed: number;
}

/** A piece of an event file that one worker reads by itself. */
export interface Unit {
  path: string;
  /** The file as the study names it. */
  name: string;
  format: string;
  /** `[start, end)` in bytes for a format that can be split, else the whole file. */
  start: number;
  end: number;
  /** Rows of the file before the unit, where places are row numbers and the file is split; 0 where absent. */
  rowsBefore?: number;
  /** Facts a reader found when it planned the file (delimiter, positions of columns, ...): plain data. */
  detail: unknown;
}

/** Most labels of a text column that `inspect` lists. */
export const MOST_LABELS = 1000;

export interface ColumnFacts {
  name: string;
  type: 'number' | 'text';
  missing: number;
  /** Values of a column of numbers that are none: `build` rejects their rows. 0 in a column of texts. */
  malformed: number;
  nonFinite: number;
  /** Least and greatest finite value, `null` for text and for columns without one. */
  least: number | null;
  greatest: number | null;
  /** For text: the distinct labels, at most `MOST_LABELS`; `null` where there are more. */
  labels: string[] | null;
}

/** What `inspect` tells of one file. */
export interface FileFacts {
  path: string;
  format: string;
  bytes: number;
  /** Rows that could be read; `rejected` counts the others. */
  rows: number;
  rejected: number;
  columns: ColumnFacts[];
}

/** One format of event files. */
export interface Reader {
  format: string;
  /** `'line'` where places are physical lines, `'row'` elsewhere. */
  places: 'line' | 'row';
  /** Units that one worker reads at once, where a reading is largely waiting; 1 where absent. */
  atOnce?: number;
  /** The columns of the file, cheaply. Throws `InputError` where the file cannot be of this format. */
  columns(path: string): Promise<{ name: string; type: 'number' | 'text' | 'unknown' }[]>;
  /** Cuts a file into at most about `pieces` units. Throws `InputError` where a needed column is absent. */
  plan(path: string, name: string, needs: readonly Need[], pieces: number): Promise<Unit[]>;
  /** Reads one unit. Throws `InputError` with the place of the damage where the file is damaged. */
  read(unit: Unit, needs: readonly Need[], signal?: AbortSignal): AsyncGenerator<Batch>;
  /** Looks at every value of a format whose columns have no types of their own; elsewhere `inspectFile` reads by types. */
  inspect?(path: string, signal?: AbortSignal): Promise<FileFacts>;
}
