import type { FlagId } from '../../src/audit/flag';

export type AxisName = 'true' | 'reconstructed';

/**
 * What is chosen: a file, a field (a column of an event file), a reason of rejection, an axis, or something of the
 * matrix. Places of the matrix are indices into the tally's columns and outcomes.
 */
export type Choice =
  | { kind: 'nothing' }
  | { kind: 'file'; path: string }
  | { kind: 'field'; name: string }
  | { kind: 'reason'; reason: string }
  | { kind: 'axis'; axis: AxisName }
  | { kind: 'column'; column: number }
  | { kind: 'bin'; outcome: number }
  | { kind: 'cell'; column: number; outcome: number }
  | { kind: 'run'; run: number; column: number }
  | { kind: 'flag'; id: FlagId; column: number | null; outcome: number | null };

const NOTHING: Choice = { kind: 'nothing' };

/** The one choice that every picture, table and the panel share. */
export class Chosen {
  now = $state.raw<Choice>(NOTHING);

  choose(choice: Choice): void {
    this.now = choice;
  }

  clear(): void {
    this.now = NOTHING;
  }

  /** The column that the choice lies in, whatever its kind. */
  get column(): number | null {
    return 'column' in this.now ? this.now.column : null;
  }

  /** The outcome that the choice lies in. */
  get outcome(): number | null {
    return 'outcome' in this.now ? this.now.outcome : null;
  }

  get run(): number | null {
    return this.now.kind === 'run' ? this.now.run : null;
  }

  /** Drops a choice that another stage has no picture of: files and axes; places of the matrix go everywhere. */
  keepFor(stage: string): void {
    const { kind } = this.now;
    if (kind === 'file' || kind === 'field' || kind === 'reason') this.clear();
    if (kind === 'axis' && stage !== 'axes') this.clear();
  }

  /** Drops a choice that lies outside a matrix of this shape. */
  keepWithin(columns: number, outcomes: number): void {
    if ((this.column ?? 0) >= columns || (this.outcome ?? 0) >= outcomes) this.clear();
  }

  /** One step inside the matrix, for arrow keys; a step from nothing starts in the middle. */
  step(across: number, up: number, columns: number, outcomes: number, order: Order): void {
    const column = stepIn(order.columns, this.column, across) ?? Math.floor(columns / 2);
    const outcome = stepIn(order.outcomes, this.outcome, up) ?? Math.floor(outcomes / 2);
    this.choose({ kind: 'cell', column, outcome });
  }
}

/** Columns from left to right and outcomes from the foot up, as they stand in the picture. */
export interface Order {
  columns: readonly number[];
  outcomes: readonly number[];
}

function stepIn(order: readonly number[], at: number | null, by: number): number | null {
  if (at === null) return null;
  const place = order.indexOf(at) + by;
  return order[Math.min(order.length - 1, Math.max(0, place))] ?? null;
}
