import { auditOf, type Audit } from '../../src/audit/audit';
import type { AuditInput } from '../../src/audit/audit-input';
import { referenceOf, type ReferenceSpectrum } from '../../src/audit/reference';
import { planEnsemble, type EnsemblePlan } from '../../src/ensemble/draw';
import { matrixSampler } from '../../src/handover/analyse';
import type { NeighbourPrior } from '../../src/posterior/neighbours';
import { posteriorOf } from '../../src/posterior/posterior';
import { priorOf, type PriorCounts } from '../../src/posterior/prior';
import { summarise, type Summary } from '../../src/posterior/summary';
import { resolveAxis, type Study } from '../../src/study/study';
import type { Tally } from '../../src/tally/tally';

/** A tally with its posterior under a study's prior; the summary is worked out when it is first asked for. */
export interface Analysis extends AuditInput {
  prior: PriorCounts & { neighbours: NeighbourPrior | null };
  summary(): Summary;
  /** Throws `InputError` where a column has no posterior. */
  ensemble(): EnsemblePlan;
}

/** The posterior of a tally under a study's prior and axes. */
export function analyse(tally: Tally, study: Study): Analysis {
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

/** Audits an analysis; `referenceTable` is the text of the study's reference table, where it has one. */
export function audit(analysis: Analysis, referenceTable: string | null): Audited {
  const { study, trueAxis, tally } = analysis;
  const sources = { where: 'study', ...(referenceTable !== null && { readTable: () => referenceTable }) };
  const reference = referenceOf(study.reference, trueAxis, tally, sources);
  return { ...auditOf(analysis, { reference, sampler: matrixSampler }), analysis, reference };
}
