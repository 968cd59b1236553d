import type { Analysis as BundleAnalysis } from '../../src/handover/analyse';
import { canonicalJson } from '../../src/study/fingerprint';
import type { Study } from '../../src/study/study';
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
import { analyse, audit, type Analysis, type Audited } from './analysis';
import { Recent } from './recent';
import type { Handled, Handlers } from './serve';
import { auditView } from './views/audit-view';
import { cellView } from './views/cell-view';
import { columnMeasures, type ColumnMeasures } from './views/column-measures';
import { columnView } from './views/column-view';
import { comparisonView } from './views/comparison-view';
import { influenceView } from './views/influence-view';
import { planView } from './views/plan-view';
import { posteriorView } from './views/posterior-view';
import { rehearsalView } from './views/rehearsal-view';
import { replicasView } from './views/replicas-view';
import { sensitivityView } from './views/sensitivity-view';

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
    replicas: ({ indices, ...at }) => ({ result: replicasView(analysed(at), at.study.ensemble.seed, indices) }),
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

function timed<T extends { seconds: number }>(work: () => T): Handled<T> {
  const began = performance.now();
  const result = work();
  return { result: { ...result, seconds: (performance.now() - began) / 1000 } };
}
