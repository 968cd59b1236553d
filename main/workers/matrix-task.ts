import { auditOf, type Audit } from '../../src/audit/audit';
import type { AuditInput } from '../../src/audit/audit-input';
import { matrixSampler, type Analysis as BundleAnalysis } from '../../src/handover/analyse';
import { referenceOf, type ReferenceSpectrum } from '../../src/audit/reference';
import { BLOCK, drawBlock, planEnsemble, type EnsemblePlan } from '../../src/ensemble/draw';
import { posteriorOf } from '../../src/posterior/posterior';
import { priorOf, type PriorCounts } from '../../src/posterior/prior';
import type { NeighbourPrior } from '../../src/posterior/neighbours';
import { summarise, type Summary } from '../../src/posterior/summary';
import { canonicalJson } from '../../src/study/fingerprint';
import { resolveAxis, type Study } from '../../src/study/study';
import type { Tally } from '../../src/tally/tally';
import type {
  AuditView,
  CellView,
  Checked,
  ColumnView,
  ComparisonView,
  InfluenceView,
  PlanView,
  PosteriorView,
  PriorSensitivityView,
  RehearsalView,
  Replicas,
  ReplicasNeeded,
} from '../bridge';
import { replicasNeeded } from '../replicas-needed';
import { auditView } from './views/audit-view';
import { cellView } from './views/cell-view';
import { columnView } from './views/column-view';
import { comparisonView } from './views/comparison-view';
import { columnMeasures, type ColumnMeasures } from './views/column-measures';
import { influenceView } from './views/influence-view';
import { planView } from './views/plan-view';
import { posteriorView } from './views/posterior-view';
import { rehearsalView } from './views/rehearsal-view';
import { sensitivityView } from './views/sensitivity-view';
import type { Handled, Handlers } from './serve';

/** A study and the tally that was taken under `key`. */
export interface AtTally {
  key: string;
  study: Study;
  /** Text of the study's reference table, where it has one. */
  referenceTable: string | null;
}

/** The calls of the matrix worker: everything that follows from a tally. */
export type MatrixCalls = {
  take: { argument: { key: string; tally: Tally }; result: null };
  measures: { argument: AtTally; result: ColumnMeasures };
  posterior: { argument: AtTally; result: PosteriorView };
  cell: { argument: AtTally & { column: number; outcome: number }; result: CellView };
  column: { argument: AtTally & { column: number }; result: ColumnView };
  replicas: { argument: AtTally & { indices: number[] }; result: Replicas };
  audit: { argument: AtTally; result: AuditView };
  /** What a bundle says of the tally, beside the model itself. */
  analysis: { argument: AtTally; result: Pick<BundleAnalysis, 'summary' | 'reference' | 'audit'> };
  influence: { argument: AtTally; result: InfluenceView };
  plan: { argument: AtTally & Pick<Checked<'plan'>, 'target'>; result: PlanView };
  priorSensitivity: { argument: AtTally; result: PriorSensitivityView };
  /** Notes are `{ done, total }` repetitions. */
  rehearse: { argument: AtTally & { repetitions: number }; result: RehearsalView };
  compare: { argument: AtTally & { bundle: string }; result: ComparisonView };
  /** Notes are `{ done, total }` blocks. */
  replicasNeeded: { argument: AtTally & { digits: number }; result: ReplicasNeeded };
};

/** A tally with its posterior under a study's prior; the summary is worked out when it is first asked for. */
export interface Analysis extends AuditInput {
  prior: PriorCounts & { neighbours: NeighbourPrior | null };
  summary(): Summary;
  /** Throws `InputError` where a column has no posterior. */
  ensemble(): EnsemblePlan;
}

/** Tallies and posteriors kept: the present ones and those an undo goes back to. */
const MOST_KEPT = 8;

/** What the matrix worker does. Plain functions, callable without a thread; results of equal questions are kept. */
export function matrixTask(): Handlers<MatrixCalls> {
  const tallies = new Recent<Tally>(MOST_KEPT);
  const analyses = new Recent<Analysis>(MOST_KEPT);
  const audits = new Recent<Audited>(MOST_KEPT);
  const analysed = (at: AtTally): Analysis => {
    const { axes, prior, credibility } = at.study;
    // A tally knows no units, but what is said of it does.
    const key = canonicalJson([at.key, axes, prior, credibility]);
    const kept = analyses.of(key, () => analyse(tallies.get(at.key), at.study));
    // What the posterior does not depend on is the caller's own: limits, reference, seed.
    return { ...kept, study: at.study };
  };
  const audited = (at: AtTally): Audited => {
    const { axes, prior, credibility, limits, reference, ensemble } = at.study;
    const key = canonicalJson([at.key, axes, prior, credibility, limits, reference, ensemble.seed, at.referenceTable]);
    return audits.of(key, () => audit(analysed(at), at.referenceTable));
  };
  return {
    take({ key, tally }) {
      tallies.set(key, tally);
      return { result: null };
    },
    measures: (at) => ({ result: columnMeasures(analysed(at)) }),
    posterior: (at) => timed(() => posteriorView(analysed(at))),
    cell: ({ column, outcome, ...at }) => ({ result: cellView(analysed(at), column, outcome) }),
    column: ({ column, ...at }) => ({ result: columnView(analysed(at), column) }),
    replicas: ({ indices, ...at }) => ({ result: replicasOf(analysed(at), at.study.ensemble.seed, indices) }),
    audit: (at) => timed(() => auditView(audited(at))),
    analysis(at) {
      const { analysis, reference, measures, flags, deep } = audited(at);
      return { result: { summary: analysis.summary(), reference, audit: { measures, flags, deep } } };
    },
    influence: (at) => timed(() => influenceView(audited(at))),
    plan: ({ target, ...at }) => timed(() => planView(audited(at), target)),
    priorSensitivity: (at) => timed(() => sensitivityView(analysed(at))),
    rehearse: ({ repetitions, ...at }, note) => timed(() => rehearsalView(audited(at), repetitions, note)),
    compare: ({ bundle, ...at }) => timed(() => comparisonView(audited(at), bundle)),
    replicasNeeded: ({ digits, ...at }, note) =>
      timed(() => {
        const { credibility, ensemble } = at.study;
        const { analysis, reference } = audited(at);
        const onBlock = (done: number, total: number): void => note({ done, total });
        const asked = { digits, credibility, seed: ensemble.seed, reference: reference.contents, onBlock };
        return { ...replicasNeeded({ ...asked, ensemble: analysis.ensemble() }), seconds: 0 };
      }),
  };
}

function analyse(tally: Tally, study: Study): Analysis {
  const trueAxis = resolveAxis(study.axes.true);
  const recoAxis = resolveAxis(study.axes.reconstructed);
  const prior = priorOf(study.prior, tally, trueAxis, recoAxis);
  const posterior = posteriorOf(tally.cells, prior);
  let summary: Summary | null = null;
  let ensemble: EnsemblePlan | null = null;
  return {
    study,
    trueAxis,
    recoAxis,
    tally,
    prior,
    posterior,
    summary: () => (summary ??= summarise(posterior, tally.cells.events, study.credibility)),
    ensemble: () => (ensemble ??= planEnsemble(posterior)),
  };
}

/** An audit with what it rests on. */
export interface Audited extends Audit {
  analysis: Analysis;
  reference: ReferenceSpectrum;
}

function audit(analysis: Analysis, referenceTable: string | null): Audited {
  const { study, trueAxis, tally } = analysis;
  const sources = { where: 'study', ...(referenceTable !== null && { readTable: () => referenceTable }) };
  const reference = referenceOf(study.reference, trueAxis, tally, sources);
  return { ...auditOf(analysis, { reference, sampler: matrixSampler }), analysis, reference };
}

/** The replicas of the given indices, the very numbers that a bundle of this study holds. */
export function replicasOf({ posterior, ensemble }: Analysis, seed: number, indices: readonly number[]): Replicas {
  const size = posterior.columns * posterior.outcomes;
  const values = new Float64Array(indices.length * size);
  const blocks = new Set(indices.map((index) => Math.floor(index / BLOCK)));
  for (const block of blocks) {
    const inBlock = indices.map((index) => index - block * BLOCK);
    const drawn = drawnOf(inBlock.filter(isInBlock), ensemble(), seed, block, size);
    inBlock.forEach((at, i) => {
      if (isInBlock(at)) values.set(drawn.subarray(at * size, (at + 1) * size), i * size);
    });
  }
  return { indices: [...indices], values };
}

function isInBlock(at: number): boolean {
  return at >= 0 && at < BLOCK;
}

/** The replicas of a block up to the last that is wanted. */
function drawnOf(wanted: number[], ensemble: EnsemblePlan, seed: number, block: number, size: number): Float64Array {
  const count = Math.max(...wanted) + 1;
  const drawn = new Float64Array(count * size);
  drawBlock(ensemble, seed, block, count, drawn);
  return drawn;
}

function timed<T extends { seconds: number }>(work: () => T): Handled<T> {
  const began = performance.now();
  const result = work();
  return { result: { ...result, seconds: (performance.now() - began) / 1000 } };
}

/** The last few values by their keys. */
export class Recent<T> {
  private readonly values = new Map<string, T>();
  constructor(private readonly most: number) {}

  /** Throws where nothing stands under `key`: a caller's fault. */
  get(key: string): T {
    const value = this.values.get(key);
    if (value === undefined) throw new Error('nothing is kept under this key');
    this.set(key, value);
    return value;
  }

  of(key: string, make: () => T): T {
    const value = this.values.has(key) ? this.get(key) : make();
    this.set(key, value);
    return value;
  }

  set(key: string, value: T): void {
    this.values.delete(key);
    this.values.set(key, value);
    if (this.values.size > this.most) this.values.delete(this.values.keys().next().value!);
  }
}
