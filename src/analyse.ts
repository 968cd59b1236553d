import { auditOf, type Audit } from './audit/audit';
import type { MatrixSampler } from './audit/matrix-draws';
import { referenceOf, type ReferenceSources, type ReferenceSpectrum } from './audit/reference';
import { drawBlock, planEnsemble } from './ensemble/draw';
import { posteriorOf, type Posterior } from './posterior/posterior';
import { priorOf } from './posterior/prior';
import { summarise, type Summary } from './posterior/summary';
import type { Axis } from './study/axis';
import { resolveAxis, type Study } from './study/study';
import type { Tally } from './tally/tally';

/** Everything that follows from a study and its tally. */
export interface Analysis {
  study: Study;
  trueAxis: Axis;
  recoAxis: Axis;
  tally: Tally;
  posterior: Posterior;
  /** Means, standard deviations and intervals of all cells, at the study's credibility. */
  summary: Summary;
  reference: ReferenceSpectrum;
  audit: Audit;
}

/**
 * Posterior, summary and audit of a tally, as a bundle of the same study holds them. `sources` gives the text of a
 * reference table where the study names one. Throws `InputError` where the study asks for a reference spectrum that its
 * true axis cannot have.
 */
export function analyse(study: Study, tally: Tally, sources: ReferenceSources = {}): Analysis {
  const trueAxis = resolveAxis(study.axes.true);
  const recoAxis = resolveAxis(study.axes.reconstructed);
  const posterior = posteriorOf(tally.cells, priorOf(study.prior, tally, trueAxis, recoAxis));
  const summary = summarise(posterior, tally.cells.events, study.credibility);
  const reference = referenceOf(study.reference, trueAxis, tally, sources);
  const input = { study, trueAxis, recoAxis, tally, posterior };
  return { ...input, summary, reference, audit: auditOf(input, { reference, sampler: matrixSampler }) };
}

/** The ensemble's own sampler: the audit looks at the first replicas of the ensemble itself. */
export const matrixSampler: MatrixSampler = (from, seed) => {
  const plan = planEnsemble(from);
  return (block, replicas, out) => drawBlock(plan, seed, block, replicas, out);
};
