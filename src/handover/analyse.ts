import { auditOf, type Audit } from '../audit/audit';
import type { MatrixSampler } from '../audit/matrix-draws';
import { referenceOf, type ReferenceSources, type ReferenceSpectrum } from '../audit/reference';
import { drawBlock, planEnsemble } from '../ensemble/draw';
import { posteriorOf, type Posterior } from '../posterior/posterior';
import { priorOf } from '../posterior/prior';
import { summarise, type Summary } from '../posterior/summary';
import type { Axis } from '../study/axis';
import { InputError } from '../study/input-error';
import { resolveAxis, type Study } from '../study/study';
import type { Tally } from '../tally/tally';

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

/** What a study and its tally give before anything is summed up: enough to draw an ensemble from. */
export type Model = Pick<Analysis, 'study' | 'trueAxis' | 'recoAxis' | 'tally' | 'posterior'>;

/**
 * The posterior of a tally. `where` names the study in errors. Throws `InputError` for a prior of zero where an outcome
 * of a column was never seen: there it is not proper (statistics of the prior, see `priorOf`).
 */
export function modelOf(study: Study, tally: Tally, where = 'study'): Model {
  const trueAxis = resolveAxis(study.axes.true);
  const recoAxis = resolveAxis(study.axes.reconstructed);
  const posterior = posteriorOf(tally.cells, priorOf(study.prior, tally, trueAxis, recoAxis));
  checkProper(tally, posterior, where);
  return { study, trueAxis, recoAxis, tally, posterior };
}

function checkProper(tally: Tally, { shape, outcomes }: Posterior, where: string): void {
  const unseen = shape.indexOf(0);
  if (unseen < 0) return;
  const column = tally.columnNames[Math.floor(unseen / outcomes)];
  throw new InputError(
    `${where}: prior`,
    `a prior of zero, but column ${column} has no event in outcome ${tally.outcomeNames[unseen % outcomes]}`,
    'give a pseudo-count above 0 (0.5 is Jeffreys), or merge bins until every outcome is seen',
  );
}

/**
 * Posterior, summary and audit of a tally, as a bundle of the same study holds them. `sources` gives the text of a
 * reference table where the study names one. Throws `InputError` where the study asks for a reference spectrum that its
 * true axis cannot have, or for a prior that is not proper.
 */
export function analyse(study: Study, tally: Tally, sources: ReferenceSources = {}): Analysis {
  return analyseModel(modelOf(study, tally, sources.where), sources);
}

/** The same for a model that stands already. */
export function analyseModel(model: Model, sources: ReferenceSources = {}): Analysis {
  const { study, tally, trueAxis, posterior } = model;
  const summary = summarise(posterior, tally.cells.events, study.credibility);
  const reference = referenceOf(study.reference, trueAxis, tally, sources);
  return { ...model, summary, reference, audit: auditOf(model, { reference, sampler: matrixSampler }) };
}

/** The ensemble's own sampler: the audit looks at the first replicas of the ensemble itself. */
export const matrixSampler: MatrixSampler = (from, seed) => {
  const plan = planEnsemble(from);
  return (block, replicas, out) => drawBlock(plan, seed, block, replicas, out);
};
