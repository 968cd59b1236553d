import type { Batch, Column, IdentityColumn, NumberColumn, Reject, TextColumn } from '../events/batch';
import { identifyText } from '../events/identity';
import { InputError } from '../study/input-error';
import type { Axis } from '../study/axis';
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

type Fault = Omit<Reject, 'place'>;

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
  private readonly keysOfRuns: { high: number; low: number }[] = [];
  private readonly tests: CutTest[];
  /** Room for the rows of a batch: how each stands, which satisfy a cut, which are kept, and the events kept. */
  private status = new Uint8Array(0);
  private pass = new Uint8Array(0);
  private list = new Int32Array(0);
  private kept: Events | null = null;

  constructor(
    private readonly plan: TallyPlan,
    private readonly mostRuns: number,
  ) {
    this.tests = cutTests(plan.cuts);
    this.cutPassed = new Float64Array(plan.cuts.length);
  }

  /**
   * Selects the events of one batch and returns them with every rejected row of it, those the reader found included.
   * The events may share the arrays of the batch, or those of the events before: whoever keeps them copies them. Throws
   * `InputError` for a tag that the study does not list; `placeOf` names a row's place in it.
   */
  select(batch: Batch, placeOf: (place: number) => string): { events: Events; rejects: Reject[] } {
    const { ledger } = this;
    const rejects = [...batch.rejects];
    const all = this.eventsOf(batch);
    this.roomFor(batch.rows);
    const cut = this.applyCuts(batch);
    const doubtful = this.markUnusable(all, batch.rows);
    if (doubtful > 0) this.judge(batch, all, rejects, placeOf);
    const events = cut + doubtful === 0 ? all : this.keepUsable(all, batch.rows);
    ledger.read += batch.rows + batch.rejects.length;
    ledger.cut += cut;
    ledger.rejected += rejects.length;
    for (const { reason } of rejects) ledger.reasons[reason] = (ledger.reasons[reason] ?? 0) + 1;
    // What the reader found stands before what was found here: both together go by place.
    rejects.sort((a, b) => a.place - b.place);
    return { events, rejects };
  }

  /** Every row of a batch as an event, checked by nobody yet. */
  private eventsOf(batch: Batch): Events {
    const { at, trueAxis, recoAxis } = this.plan;
    const identity = at.event < 0 ? null : (batch.columns[at.event] as IdentityColumn);
    return {
      rows: batch.rows,
      truth: valuesOf(batch.columns[at.true]!, trueAxis),
      reco: valuesOf(batch.columns[at.reconstructed]!, recoAxis),
      weight: at.weight < 0 ? null : (batch.columns[at.weight] as NumberColumn).values,
      run: at.run < 0 ? null : this.runsOf(batch.columns[at.run] as TextColumn),
      identity: identity && { high: identity.high, low: identity.low, places: batch.places },
    };
  }

  private roomFor(rows: number): void {
    if (this.status.length < rows) {
      this.status = new Uint8Array(rows);
      this.pass = new Uint8Array(rows);
      this.list = new Int32Array(rows);
      this.kept = null;
    }
    this.status.fill(USABLE, 0, rows);
  }

  /** Marks the rows that fail a cut, and returns how many. */
  private applyCuts(batch: Batch): number {
    const { pass, status } = this;
    this.tests.forEach((test, c) => {
      test(batch.columns[this.plan.at.cuts[c]!]!, batch.rows, pass);
      let passed = 0;
      // Without a branch: which rows pass is hard to foretell.
      for (let i = 0; i < batch.rows; i++) {
        passed += pass[i]!;
        status[i]! |= CUT * (1 - pass[i]!);
      }
      this.cutPassed[c]! += passed;
    });
    let cut = 0;
    if (this.tests.length > 0) for (let i = 0; i < batch.rows; i++) cut += status[i]!;
    return cut;
  }

  /** Marks the rows that pass the cuts and yet may be unusable, one role after the other, and returns how many. */
  private markUnusable({ truth, reco, weight, run, identity }: Events, rows: number): number {
    const { status, plan } = this;
    const tagged = plan.trueAxis.kind === 'tags' || plan.recoAxis.kind === 'tags';
    let marked = 0;
    const mark = (i: number): void => {
      if (status[i] !== USABLE) return;
      status[i] = DOUBTFUL;
      marked++;
    };
    for (let i = 0; i < rows; i++) if (!(Math.abs(truth[i]!) < Infinity)) mark(i);
    if (plan.lostRecorded) {
      for (let i = 0; i < rows; i++) if (Math.abs(reco[i]!) === Infinity) mark(i);
    } else {
      for (let i = 0; i < rows; i++) if (!(Math.abs(reco[i]!) < Infinity)) mark(i);
    }
    if (tagged) for (let i = 0; i < rows; i++) if (truth[i] === UNLISTED || reco[i] === UNLISTED) mark(i);
    if (weight) for (let i = 0; i < rows; i++) if (!isWeight(weight[i]!)) mark(i);
    if (run) for (let i = 0; i < rows; i++) if (run[i]! < 0) mark(i);
    if (identity) for (let i = 0; i < rows; i++) if (identity.high[i] === 0 && identity.low[i] === 0) mark(i);
    return marked;
  }

  /** Decides about the doubtful rows, and says what is wrong with those that are of no use. */
  private judge(batch: Batch, all: Events, rejects: Reject[], placeOf: (place: number) => string): void {
    const { status } = this;
    for (let i = 0; i < batch.rows; i++) {
      if (status[i] !== DOUBTFUL) continue;
      const fault = this.faultOf(batch, all, i, placeOf);
      status[i] = fault ? REJECTED : USABLE;
      if (fault) rejects.push({ place: batch.places[i]!, ...fault });
    }
  }

  /** Copies the usable rows. */
  private keepUsable(all: Events, rows: number): Events {
    const { status, list } = this;
    let count = 0;
    for (let i = 0; i < rows; i++) {
      list[count] = i;
      count += status[i] === USABLE ? 1 : 0;
    }
    this.kept ??= roomLike(all, list.length);
    const { truth, reco, weight, run, identity } = this.kept;
    gather(all.truth, list, count, truth);
    gather(all.reco, list, count, reco);
    if (weight) gather(all.weight!, list, count, weight);
    if (run) gather(all.run!, list, count, run);
    if (identity) {
      gather(all.identity!.high, list, count, identity.high);
      gather(all.identity!.low, list, count, identity.low);
      gather(all.identity!.places, list, count, identity.places);
    }
    this.kept.rows = count;
    return this.kept;
  }

  /** What is wrong with a doubtful row; `null` for one that turns out to be usable (counted as unmatched). */
  private faultOf(batch: Batch, events: Events, i: number, placeOf: (place: number) => string): Fault | null {
    const { at, needs, countUnmatched, lostRecorded, trueAxis, recoAxis } = this.plan;
    const { truth, reco, weight, run, identity } = events;
    const fault = (need: number, value: number | null, reason: string): Fault => ({
      column: needs[need]!.column,
      value: value === null || Number.isNaN(value) ? null : String(value),
      reason,
    });
    const [t, r] = [truth[i]!, reco[i]!];
    if (Number.isNaN(t) && !(countUnmatched && !Number.isNaN(r))) return fault(at.true, t, 'no true value');
    if (t === UNLISTED && trueAxis.kind === 'tags') throw unlistedTag(batch, at.true, 'true', i, placeOf);
    if (Math.abs(t) === Infinity) return fault(at.true, t, 'true value not finite');
    if (Number.isNaN(r) && !lostRecorded) return fault(at.reconstructed, r, 'no reconstructed value');
    if (r === UNLISTED && recoAxis.kind === 'tags')
      throw unlistedTag(batch, at.reconstructed, 'reconstructed', i, placeOf);
    if (Math.abs(r) === Infinity) return fault(at.reconstructed, r, 'reconstructed value not finite');
    if (weight && !isWeight(weight[i]!)) {
      return fault(at.weight, weight[i]!, Number.isNaN(weight[i]) ? 'no weight' : 'weight out of range');
    }
    if (run && run[i]! < 0) return fault(at.run, null, 'no run label');
    if (identity && identity.high[i] === 0 && identity.low[i] === 0) return fault(at.event, null, 'no event identity');
    return null;
  }

  private runsOf(column: TextColumn): Int32Array {
    const codes = column.labels.map((label) => this.runCode(label));
    return column.codes.map((code) => (code < 0 ? -1 : codes[code]!));
  }

  /**
   * The identities of selected events, told apart by run where runs are read: event numbers often begin anew with every
   * run (common practice), and only one that repeats within its run is a duplicate.
   */
  identitiesOf({ identity, run, rows }: Events): Events['identity'] {
    if (!identity || !run) return identity;
    const { keysOfRuns } = this;
    while (keysOfRuns.length < this.runLabels.length) keysOfRuns.push(keyOf(this.runLabels[keysOfRuns.length]!));
    const [high, low] = [new Uint32Array(rows), new Uint32Array(rows)];
    for (let i = 0; i < rows; i++) {
      const key = keysOfRuns[run[i]!]!;
      high[i] = identity.high[i]! ^ key.high;
      low[i] = identity.low[i]! ^ key.low;
    }
    return { high, low, places: identity.places };
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

/** Where a row stands while its batch is selected. */
const USABLE = 0;
const CUT = 1;
const DOUBTFUL = 2;
const REJECTED = 3;

/** Marks a tag that the study does not list, until the cuts have had their say. */
const UNLISTED = -1;

function valuesOf(column: Column, axis: Axis): Float64Array {
  if (axis.kind !== 'tags') return (column as NumberColumn).values;
  const { codes, labels } = column as TextColumn;
  const ofCode = labels.map((label) => axis.tags.indexOf(label));
  return Float64Array.from(codes, (code) => (code < 0 ? NaN : ofCode[code]!));
}

function unlistedTag(
  batch: Batch,
  need: number,
  axis: string,
  i: number,
  placeOf: (place: number) => string,
): InputError {
  const { labels, codes } = batch.columns[need] as TextColumn;
  return new InputError(
    placeOf(batch.places[i]!),
    `tag "${labels[codes[i]!]}" is not in axes.${axis}.tags`,
    'list it there, or cut these rows',
  );
}

function keyOf(label: string): { high: number; low: number } {
  const [high, low] = [new Uint32Array(1), new Uint32Array(1)];
  identifyText(`run ${label}`, high, low, 0);
  return { high: high[0]!, low: low[0]! };
}

/** Zero, or of a size whose square is a number. */
function isWeight(w: number): boolean {
  const size = Math.abs(w);
  return size === 0 || (size >= LEAST_WEIGHT && size <= LARGEST_WEIGHT);
}

/** Room for `rows` events of the roles that `like` has, holding none. */
function roomLike({ weight, run, identity }: Events, rows: number): Events {
  return {
    rows: 0,
    truth: new Float64Array(rows),
    reco: new Float64Array(rows),
    weight: weight && new Float64Array(rows),
    run: run && new Int32Array(rows),
    identity: identity && { high: new Uint32Array(rows), low: new Uint32Array(rows), places: new Float64Array(rows) },
  };
}

function gather<A extends Float64Array | Int32Array | Uint32Array>(
  from: A,
  list: Int32Array,
  count: number,
  to: A,
): void {
  for (let k = 0; k < count; k++) to[k] = from[list[k]!]!;
}
