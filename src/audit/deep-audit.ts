import type { AuditInput } from './audit-input';
import { conditioningWatcher, type Conditioning } from './conditioning';
import { driftOf, type Drift } from './drift';
import { feedInWatcher, type FeedIn } from './feed-in';
import type { Findings } from './findings';
import { influenceWatcher, type Influence } from './influence';
import { auditReplicas, watchMatrices, type MatrixSampler } from './matrix-draws';
import { auditPurity } from './purity';
import type { ReferenceSpectrum } from './reference';
import { resolutionWatcher } from './resolution';
import { slopeBiasOf, type SlopeBias } from './slope-bias';

/** What the measures of the matrix as a whole rest on besides the tally. */
export interface AuditSources {
  reference: ReferenceSpectrum;
  sampler: MatrixSampler;
}

/** The parts of the audit whose measures come with more than a list: the window draws them. */
export interface DeepAudit {
  slopeBias: SlopeBias;
  drift: Drift;
  feedIn: FeedIn;
  influence: Influence;
  conditioning: Conditioning;
  findings: Findings;
}

/** Everything that needs a reference spectrum or sampled matrices; each matrix is drawn once and shown to all parts. */
export function deepAudit(input: AuditInput, { reference, sampler }: AuditSources): DeepAudit {
  const replicas = auditReplicas(input.posterior);
  const feedIn = feedInWatcher(input, reference, replicas);
  const influence = influenceWatcher(input, reference, replicas);
  const conditioning = conditioningWatcher(input, replicas);
  const resolution = resolutionWatcher(input, replicas);
  const watchers = [feedIn, influence, conditioning, resolution];
  watchMatrices(input.posterior, sampler, input.study.ensemble.seed, replicas, watchers);
  const parts = {
    slopeBias: slopeBiasOf(input, reference),
    drift: driftOf(input),
    feedIn: feedIn.result(),
    influence: influence.result(),
    conditioning: conditioning.result(),
  };
  const purity = auditPurity(input, reference);
  return { ...parts, findings: findingsOf(parts, purity, resolution.result()) };
}

function findingsOf(parts: Omit<DeepAudit, 'findings'>, purity: Findings, resolution: Findings): Findings {
  const { slopeBias, drift, feedIn, influence, conditioning } = parts;
  const { folded, matrixVariance, dataVariance } = influence;
  const { singularValues, resolvable } = conditioning;
  return {
    columns: { ...purity.columns, ...resolution.columns, slopeBias: slopeBias.measure, drift: drift.measure },
    bins: { feedIn: feedIn.measure, folded, matrixVariance, dataVariance },
    matrix: { singularValues, resolvable },
    flags: [feedIn, purity, slopeBias, drift, conditioning, influence].flatMap(({ flags }) => flags),
  };
}
