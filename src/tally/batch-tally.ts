import type { Batch, Reject } from '../events/batch';
import type { TallyPlan } from './plan';
import { Selection, type Events } from './selection';
import type { Duplicates, Tally } from './tally';
import { mostRuns, TallySums } from './tally-sums';

/** Selects and bins batches in one thread: the whole way from rows to a tally for a program that has no workers. */
export class BatchTally {
  private readonly selection: Selection;
  private readonly sums: TallySums;

  constructor(plan: TallyPlan) {
    this.selection = new Selection(plan, mostRuns(plan));
    this.sums = new TallySums(plan);
  }

  /**
   * Takes one batch; returns its rejected rows and the identities of its events (`null` where none is read).
   * `placeOf` names a row's place in errors.
   */
  add(
    batch: Batch,
    placeOf: (place: number) => string,
  ): { rejects: Reject[]; rows: number; identity: Events['identity'] } {
    const { events, rejects } = this.selection.select(batch, placeOf);
    this.sums.add(events, this.selection.runLabels);
    return { rejects, rows: events.rows, identity: this.selection.identitiesOf(events) };
  }

  /** The finished tally. Nothing may be added after it. */
  finish(duplicates: Duplicates | null): Tally {
    const { read, cut, rejected, reasons } = this.selection.ledger;
    Object.assign(this.sums.ledger, { read, cut, rejected, reasons });
    return this.sums.finish(duplicates);
  }
}
