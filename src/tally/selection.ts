import type { Batch, NumberColumn, Reject, TextColumn } from '../events/batch';
import { InputError } from '../study/input-error';
import type { Axis, TagAxis } from '../study/axis';
import { cutTests, type CutTest } from './cut';
import { emptyLedger, type Ledger } from './ledger';
import type { TallyPlan } from './plan';

/** Largest magnitude of a weight whose square is still a number, with room for sums; and least, for its reciprocal. */
export const LARGEST_WEIGHT = 1e150;
export const LEAST_WEIGHT = 1e-150;

/** Events that passed every cut and check, ready to be binned. */
export interface Events {
  rows: number;
  /** True values, or tag indices. `NaN`: reconstructed without a true value (only where the study counts these). */
  truth: Float64Array;
  /** Reconstructed values, or tag indices. `NaN`: lost. */
  reco: Float64Array;
  /** `null` where no weight is read. */
  weight: Float64Array | null;
  /** Codes into `Selection.runLabels`; `null` where no run is read. */
  run: Int32Array | null;
  /** Keys of event identities and their places; `null` where none is read. */
  identity: { high: Uint32Array; low: Uint32Array; places: Float64Array } | null;
}

/**
 * Takes batches of rows and parts them: cut, rejected, or selected to be binned. A row that cannot be read is
 * rejected; else a row that fails a cut is cut (a missing value satisfies no comparison); else a row that cannot be
 * used is rejected; the rest are events. Keeps the ledger of what it saw.
 */
export class Selection {
  readonly ledger: Ledger = emptyLedger();
  /** Rows that satisfy each cut by itself. */
  readonly cutPassed: Float64Array;
  readonly runLabels: string[] = [];
  private readonly runCodes = new Map<string, number>();
  private readonly tests: CutTest[];

  constructor(
    private readonly plan: TallyPlan,
    private readonly mostRuns: number,
  ) {
    this.tests = cutTests(plan.cuts);
    this.cutPassed = new Float64Array(plan.cuts.length);
  }

  /**
   * Selects the events of one batch and returns them with every rejected row of it, those the reader found included.
   * Throws `InputError` for a tag that the study does not list; `placeOf` names a row's place in it.
   */
  select(batch: Batch, placeOf: (place: number) => string): { events: Events; rejects: Reject[] } {
    const { plan, ledger } = this;
    const rejects = [...batch.rejects];
    const keep = this.applyCuts(batch);
    const events = emptyEvents(plan, batch.rows);
    const row = this.rowReader(batch, events, placeOf);
    for (let i = 0; i < batch.rows; i++) {
      if (keep && keep[i] === 0) {
        ledger.cut++;
        continue;
      }
      const fault = row(i, events.rows);
      if (fault) rejects.push({ place: batch.places[i]!, ...fault });
      else events.rows++;
    }
    ledger.read += batch.rows + batch.rejects.length;
    ledger.rejected += rejects.length;
    for (const { reason } of rejects) ledger.reasons[reason] = (ledger.reasons[reason] ?? 0) + 1;
    return { events, rejects };
  }

  private applyCuts(batch: Batch): Uint8Array | null {
    if (this.tests.length === 0) return null;
    const keep = new Uint8Array(batch.rows).fill(1);
    const pass = new Uint8Array(batch.rows);
    this.tests.forEach((test, c) => {
      test(batch.columns[this.plan.at.cuts[c]!]!, batch.rows, pass);
      let passed = 0;
      for (let i = 0; i < batch.rows; i++) {
        passed += pass[i]!;
        keep[i]! &= pass[i]!;
      }
      this.cutPassed[c]! += passed;
    });
    return keep;
  }

  /** A function that checks row `i` and writes it as event `at`, or returns what is wrong with it. */
  private rowReader(batch: Batch, events: Events, placeOf: (place: number) => string) {
    const { plan } = this;
    const { at, needs } = plan;
    const truth = valuesOf(batch, at.true, plan.trueAxis);
    const reco = valuesOf(batch, at.reconstructed, plan.recoAxis);
    const unlisted = (axis: 'true' | 'reconstructed', i: number): InputError => {
      const column = batch.columns[at[axis]] as TextColumn;
      return new InputError(
        placeOf(batch.places[i]!),
        `tag "${column.labels[column.codes[i]!]}" is not in axes.${axis}.tags`,
        'list it there, or cut these rows',
      );
    };
    const weight = at.weight < 0 ? null : (batch.columns[at.weight] as NumberColumn).values;
    const run = at.run < 0 ? null : this.runsOf(batch.columns[at.run] as TextColumn);
    const identity = at.event < 0 ? null : batch.columns[at.event]!;
    const fault = (need: number, value: string | null, reason: string) => ({ column: needs[need]!.column, value, reason });

    return (i: number, to: number): Omit<Reject, 'place'> | null => {
      const t = truth[i]!;
      const r = reco[i]!;
      if (t !== t && !(plan.countUnmatched && r === r)) return fault(at.true, null, 'no true value');
      if (t === UNLISTED && plan.trueAxis.kind === 'tags') throw unlisted('true', i);
      if (r === UNLISTED && plan.recoAxis.kind === 'tags') throw unlisted('reconstructed', i);
      if (t === Infinity || t === -Infinity) return fault(at.true, String(t), 'true value not finite');
      if (r !== r && !plan.lostRecorded) return fault(at.reconstructed, null, 'no reconstructed value');
      if (r === Infinity || r === -Infinity) return fault(at.reconstructed, String(r), 'reconstructed value not finite');
      if (weight) {
        const w = weight[i]!;
        if (w !== w) return fault(at.weight, null, 'no weight');
        const size = Math.abs(w);
        if (size > LARGEST_WEIGHT || (size < LEAST_WEIGHT && size > 0)) {
          return fault(at.weight, String(w), 'weight out of range');
        }
        events.weight![to] = w;
      }
      if (run) {
        if (run[i]! < 0) return fault(at.run, null, 'no run label');
        events.run![to] = run[i]!;
      }
      if (identity?.as === 'identity') {
        if (identity.high[i] === 0 && identity.low[i] === 0) return fault(at.event, null, 'no event identity');
        events.identity!.high[to] = identity.high[i]!;
        events.identity!.low[to] = identity.low[i]!;
        events.identity!.places[to] = batch.places[i]!;
      }
      events.truth[to] = t;
      events.reco[to] = r;
      return null;
    };
  }

  private runsOf(column: TextColumn): Int32Array {
    const codes = column.labels.map((label) => this.runCode(label));
    return column.codes.map((code) => (code < 0 ? -1 : codes[code]!));
  }

  private runCode(label: string): number {
    const known = this.runCodes.get(label);
    if (known !== undefined) return known;
    if (this.runLabels.length >= this.mostRuns) throw tooManyRuns(this.plan, this.mostRuns);
    this.runCodes.set(label, this.runLabels.length);
    return this.runLabels.push(label) - 1;
  }
}

/** The error for a run column that has more labels than a tally by run can hold. */
export function tooManyRuns(plan: TallyPlan, most: number): InputError {
  const column = plan.needs[plan.at.run]!.column;
  return new InputError(
    'roles.run',
    `column "${column}" has more than ${most} labels`,
    'name a column that labels runs (not events), or leave roles.run out',
  );
}

function valuesOf(batch: Batch, need: number, axis: Axis): Float64Array {
  const column = batch.columns[need]!;
  return axis.kind === 'tags' ? tagIndices(column as TextColumn, axis) : (column as NumberColumn).values;
}

/** Marks a tag that the study does not list, until the cuts have had their say. */
const UNLISTED = -1;

function tagIndices(column: TextColumn, axis: TagAxis): Float64Array {
  const ofCode = column.labels.map((label) => axis.tags.indexOf(label));
  return Float64Array.from(column.codes, (code) => (code < 0 ? NaN : ofCode[code]!));
}

function emptyEvents(plan: TallyPlan, rows: number): Events {
  return {
    rows: 0,
    truth: new Float64Array(rows),
    reco: new Float64Array(rows),
    weight: plan.at.weight < 0 ? null : new Float64Array(rows),
    run: plan.at.run < 0 ? null : new Int32Array(rows),
    identity:
      plan.at.event < 0
        ? null
        : { high: new Uint32Array(rows), low: new Uint32Array(rows), places: new Float64Array(rows) },
  };
}
