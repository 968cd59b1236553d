import type { Batch, Reject } from '../events/batch';
import type { TallyPlan } from './plan';
import { Selection, type Events } from './selection';
import type { Duplicates, Tally } from './tally';
import { mostRuns, TallySums } from './tally-sums';

/** Selects and bins batches: the whole way from rows to a tally, in one thread or in each of several. */
export class BatchTally {
  readonly selection: Selection;
  private readonly sums: TallySums;

  constructor(plan: TallyPlan) {
    this.selection = new Selection(plan, mostRuns(plan));
    this.sums = new TallySums(plan);
  }

  /**
   * Takes one batch; returns its events, its rejected rows, and the identities of the events (`null` where none is read).
   * `placeOf` names a row's place in errors.
   */
  add(
    batch: Batch,
    placeOf: (place: number) => string,
  ): { events: Events; rejects: Reject[]; identity: Events['identity'] } {
    const { events, rejects } = this.selection.select(batch, placeOf);
    this.sums.add(events, this.selection.runLabels);
    return { events, rejects, identity: this.selection.identitiesOf(events) };
  }

  /** The finished tally. Nothing may be added after it. */
  finish(duplicates: Duplicates | null): Tally {
    return this.finishedSums().finish(duplicates);
  }

  /**
   * The sums with the whole ledger: the selection saw every row, the sums what it selected. Nothing may be added after it.
   */
  finishedSums(): TallySums {
    const { read, cut, rejected, reasons } = this.selection.ledger;
    Object.assign(this.sums.ledger, { read, cut, rejected, reasons });
    return this.sums;
  }
}
