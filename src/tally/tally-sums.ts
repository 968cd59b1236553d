import { CellSums, type PlainCellSums } from './cell-sums';
import { binnerOf, type Binner } from './binner';
import { addLedger, emptyLedger, type Ledger } from './ledger';
import { midpoints, type TallyPlan } from './plan';
import { tooManyRuns, type Events } from './selection';
import type { Duplicates, Tally } from './tally';

/** Most run labels a tally keeps apart. */
export const MOST_RUNS = 1000;
/** Most cells over all runs, about 160 MB unweighted: beyond it a tally by run no longer fits the memory promised. */
export const MOST_RUN_CELLS = 20_000_000;

/** `TallySums` as plain arrays. */
export interface PlainTallySums {
  halves: PlainCellSums;
  runs: { label: string; cells: PlainCellSums }[];
  unmatched: PlainCellSums | null;
  largestSquare: Float64Array | null;
  trueRange: { least: number; greatest: number };
  ledger: Ledger;
}

/** How many runs a plan may have: by number, and by the cells they would take. */
export function mostRuns(plan: TallyPlan): number {
  const cells = plan.columnNames.length * plan.outcomeNames.length;
  return Math.max(1, Math.min(MOST_RUNS, Math.floor(MOST_RUN_CELLS / cells)));
}

/** A tally while it grows. Tallies of disjoint events merge to the tally of their union, to the bit, in any order. */
export class TallySums {
  readonly ledger: Ledger = emptyLedger();
  private readonly outcomes: number;
  private readonly columns: number;
  private readonly weighted: boolean;
  private halves: CellSums;
  private unmatched: CellSums | null;
  private runs = new Map<string, CellSums>();
  private largestSquare: Float64Array | null;
  private trueRange = { least: Infinity, greatest: -Infinity };
  private readonly trueBinner: Binner;
  private readonly recoBinner: Binner;
  private readonly middles: Float64Array;
  /** Room for the places of a batch. */
  private places = { columns: new Int32Array(0), outcomes: new Int32Array(0) };

  constructor(private readonly plan: TallyPlan) {
    this.columns = plan.columnNames.length;
    this.outcomes = plan.outcomeNames.length;
    this.weighted = plan.at.weight >= 0;
    this.halves = CellSums.empty(this.columns * 2 * this.outcomes, this.weighted);
    this.unmatched = plan.countUnmatched ? CellSums.empty(this.outcomes, this.weighted) : null;
    this.largestSquare = this.weighted ? new Float64Array(this.columns) : null;
    this.trueBinner = binnerOf(plan.trueAxis);
    this.recoBinner = binnerOf(plan.recoAxis);
    this.middles = midpoints(plan.trueAxis);
  }

  /** Bins selected events. `runLabels` names the codes of `events.run`. */
  add(events: Events, runLabels: readonly string[]): void {
    const { rows, truth, reco } = events;
    const kept = this.asPlanned(events);
    this.roomFor(rows);
    const { columns, outcomes } = this.places;
    this.trueBinner.places(truth, rows, columns);
    this.recoBinner.places(reco, rows, outcomes);
    const matched = this.weighted || kept.run || this.unmatched ? this.addAll(kept, runLabels) : this.addPlain(events);
    this.widenRange(truth, rows);
    this.ledger.tallied += matched;
    this.ledger.unmatched += rows - matched;
  }

  /** Events kept in memory may carry weights and runs that a plan of fewer roles does not ask for. */
  private asPlanned(events: Events): Events {
    return {
      ...events,
      weight: this.weighted ? events.weight : null,
      run: this.plan.at.run < 0 ? null : events.run,
    };
  }

  /** The way of most studies, kept apart because it is the inner loop of a large reading: counts of matched events. */
  private addPlain({ rows, truth }: Events): number {
    const { columns, outcomes } = this.places;
    const { middles, outcomes: width } = this;
    const { events } = this.halves;
    for (let i = 0; i < rows; i++) {
      const j = columns[i]!;
      const half = Number(truth[i]! >= middles[j]!);
      const k = outcomes[i]!;
      events[(j * 2 + half) * width + (k < 0 ? width - 1 : k)]!++;
    }
    return rows;
  }

  /** Returns how many of the events have a true value. */
  private addAll({ rows, truth, weight, run }: Events, runLabels: readonly string[]): number {
    const { columns, outcomes } = this.places;
    const runSums = run && runLabels.map((label) => this.sumsOfRun(label));
    const lost = this.outcomes - 1;
    let matched = 0;
    for (let i = 0; i < rows; i++) {
      const j = columns[i]!;
      const k = outcomes[i]! < 0 ? lost : outcomes[i]!;
      const w = weight ? weight[i]! : 1;
      if (j < 0) {
        this.unmatched!.add(k, w);
        continue;
      }
      matched++;
      const half = truth[i]! >= this.middles[j]! ? 1 : 0;
      this.halves.add((j * 2 + half) * this.outcomes + k, w);
      if (runSums) runSums[run![i]!]!.add(j * this.outcomes + k, w);
      if (weight) this.largestSquare![j] = Math.max(this.largestSquare![j]!, w * w);
    }
    return matched;
  }

  private roomFor(rows: number): void {
    if (this.places.columns.length >= rows) return;
    this.places = { columns: new Int32Array(rows), outcomes: new Int32Array(rows) };
  }

  merge(other: TallySums): void {
    this.halves.merge(other.halves);
    if (other.unmatched) this.unmatched!.merge(other.unmatched);
    for (const [label, cells] of other.runs) this.sumsOfRun(label).merge(cells);
    other.largestSquare?.forEach((v, j) => (this.largestSquare![j] = Math.max(this.largestSquare![j]!, v)));
    this.trueRange.least = Math.min(this.trueRange.least, other.trueRange.least);
    this.trueRange.greatest = Math.max(this.trueRange.greatest, other.trueRange.greatest);
    addLedger(this.ledger, other.ledger);
  }

  /** The finished tally: sums correctly rounded, runs sorted by label. */
  finish(duplicates: Duplicates | null): Tally {
    const { columns, outcomes, plan } = this;
    const perColumn = 2 * outcomes;
    const total = this.halves.gather(columns * outcomes, (i) => Math.floor(i / perColumn) * outcomes + (i % outcomes));
    const cells = total.finish();
    return {
      columnNames: plan.columnNames,
      outcomeNames: plan.outcomeNames,
      weighted: this.weighted,
      cells,
      halves: this.halves.finish(),
      runs: plan.at.run < 0 ? null : this.finishRuns(),
      largestSquare: this.largestSquare?.slice() ?? null,
      unmatched: this.unmatched?.finish() ?? null,
      trueRange: plan.trueAxis.kind === 'numeric' && this.ledger.tallied > 0 ? { ...this.trueRange } : null,
      ledger: { ...this.ledger, reasons: sortedKeys(this.ledger.reasons), clamped: clampedCells(cells) },
      duplicates,
    };
  }

  /** As plain arrays: canonical for a file (equal tallies give equal bytes), as they stand for another thread. */
  toPlain(canonical: boolean): PlainTallySums {
    return {
      halves: this.halves.toPlain(canonical),
      runs: this.sortedRuns().map((label) => ({ label, cells: this.runs.get(label)!.toPlain(canonical) })),
      unmatched: this.unmatched?.toPlain(canonical) ?? null,
      largestSquare: this.largestSquare,
      trueRange: this.trueRange,
      ledger: { ...this.ledger, reasons: sortedKeys(this.ledger.reasons) },
    };
  }

  static fromPlain(plan: TallyPlan, plain: PlainTallySums): TallySums {
    const sums = new TallySums(plan);
    sums.halves = CellSums.fromPlain(plain.halves);
    sums.unmatched = plain.unmatched && CellSums.fromPlain(plain.unmatched);
    sums.runs = new Map(plain.runs.map(({ label, cells }) => [label, CellSums.fromPlain(cells)]));
    sums.largestSquare = plain.largestSquare;
    sums.trueRange = plain.trueRange;
    addLedger(sums.ledger, plain.ledger);
    return sums;
  }

  private sumsOfRun(label: string): CellSums {
    let sums = this.runs.get(label);
    if (!sums) {
      if (this.runs.size >= mostRuns(this.plan)) throw tooManyRuns(this.plan, mostRuns(this.plan));
      sums = CellSums.empty(this.columns * this.outcomes, this.weighted);
      this.runs.set(label, sums);
    }
    return sums;
  }

  private sortedRuns(): string[] {
    return [...this.runs.keys()].sort(byNumberThenText);
  }

  private finishRuns(): NonNullable<Tally['runs']> {
    const labels = this.sortedRuns();
    const length = this.columns * this.outcomes;
    const joined = (): Float64Array => new Float64Array(labels.length * length);
    const cells = {
      events: joined(),
      weights: this.weighted ? joined() : null,
      squares: this.weighted ? joined() : null,
    };
    labels.forEach((label, r) => {
      const run = this.runs.get(label)!.finish();
      cells.events.set(run.events, r * length);
      cells.weights?.set(run.weights!, r * length);
      cells.squares?.set(run.squares!, r * length);
    });
    return { labels, cells };
  }

  private widenRange(truth: Float64Array, rows: number): void {
    let { least, greatest } = this.trueRange;
    for (let i = 0; i < rows; i++) {
      if (truth[i]! < least) least = truth[i]!;
      if (truth[i]! > greatest) greatest = truth[i]!;
    }
    this.trueRange = { least, greatest };
  }
}

/** Run labels in the order a reader expects: numbers by value, then texts. */
function byNumberThenText(a: string, b: string): number {
  const x = Number(a);
  const y = Number(b);
  if (x === x && y === y && x !== y) return x - y;
  if ((x === x) !== (y === y)) return x === x ? -1 : 1;
  return a < b ? -1 : a > b ? 1 : 0;
}

function sortedKeys<V>(record: Record<string, V>): Record<string, V> {
  return Object.fromEntries(Object.entries(record).sort(([a], [b]) => (a < b ? -1 : 1)));
}

/** Cells that have events but no positive weight, and the weight they hold: it is set aside by the posterior. */
function clampedCells({ events, weights }: Tally['cells']): Ledger['clamped'] {
  const clamped = { cells: 0, weight: 0 };
  weights?.forEach((w, i) => {
    if (events[i]! === 0 || w > 0) return;
    clamped.cells++;
    clamped.weight += w;
  });
  return clamped;
}
