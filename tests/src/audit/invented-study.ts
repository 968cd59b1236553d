import type { AuditInput } from '../../../src/audit/audit-input';
import type { MatrixSampler } from '../../../src/audit/matrix-draws';
import { drawBlock, planEnsemble } from '../../../src/ensemble/draw';
import { posteriorOf } from '../../../src/posterior/posterior';
import { evenPrior } from '../../../src/posterior/prior';
import { parseStudy, resolveAxis, type Study, type StudyInput } from '../../../src/study/study';
import type { Tally } from '../../../src/tally/tally';

/** A study of `bins` by `outcomes` bins from 0 to their number, with what a test states instead of the defaults. */
export function studyOf(bins: number, outcomes: number, more: Partial<StudyInput> = {}): Study {
  return parseStudy({
    schema: 'entasis.study/1',
    events: { files: ['invented.csv'] },
    roles: { true: 't', reconstructed: 'r' },
    axes: {
      true: { label: 'Energy', unit: 'MeV', from: 0, to: bins, bins },
      reconstructed: { label: 'Signal', unit: 'MeV', from: 0, to: outcomes, bins: outcomes },
    },
    ...more,
  });
}

/** The input of an audit whose posterior has the study's even prior; axes are the study's, names the tally's own. */
export function inputOf(study: Study, tally: Tally): AuditInput {
  const prior = evenPrior(study.prior as { pseudoCount: number }, tally);
  return {
    study,
    trueAxis: resolveAxis(study.axes.true),
    recoAxis: resolveAxis(study.axes.reconstructed),
    tally,
    posterior: posteriorOf(tally.cells, prior),
  };
}

/** The program's own sampler, as it is handed to the audit. */
export const sampler: MatrixSampler = (from, seed) => {
  const plan = planEnsemble(from);
  return (block, replicas, out) => drawBlock(plan, seed, block, replicas, out);
};
