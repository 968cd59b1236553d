import { auditOf, type Audit } from '../../../src/audit/audit';
import type { AuditInput } from '../../../src/audit/audit-input';
import type { Flag, FlagId } from '../../../src/audit/flag';
import { posteriorOf } from '../../../src/posterior/posterior';
import { priorOf } from '../../../src/posterior/prior';
import { columnNames, outcomeNames } from '../../../src/study/axis';
import type { MatrixSampler } from '../../../src/audit/matrix-draws';
import { drawBlock, planEnsemble } from '../../../src/ensemble/draw';
import { parseStudy, resolveAxis, STUDY_SCHEMA, type StudyInput } from '../../../src/study/study';
import { tallyOf, type CampaignCells } from './invented-campaign';

type Given = Partial<Pick<StudyInput, 'axes' | 'prior' | 'limits' | 'credibility' | 'lost' | 'reference'>>;

/** Two true bins from 0 to 2 MeV, three reconstructed bins from 0 to 3 MeV. */
const AXES: StudyInput['axes'] = {
  true: { unit: 'MeV', from: 0, to: 2, bins: 2 },
  reconstructed: { unit: 'MeV', from: 0, to: 3, bins: 3 },
};

/** What an audit of hand-made cells looks at. Names come from the axes. */
export function inputOf(cells: Omit<CampaignCells, 'columnNames' | 'outcomeNames'>, given: Given = {}): AuditInput {
  const study = parseStudy({
    schema: STUDY_SCHEMA,
    events: { files: ['made.csv'] },
    roles: { true: 't', reconstructed: 'r' },
    axes: AXES,
    ...given,
  });
  const [trueAxis, recoAxis] = [resolveAxis(study.axes.true), resolveAxis(study.axes.reconstructed)];
  const names = { columnNames: columnNames(trueAxis), outcomeNames: outcomeNames(recoAxis, study.lost === 'missing') };
  const tally = tallyOf({ ...cells, ...names });
  const posterior = posteriorOf(tally.cells, priorOf(study.prior, tally, trueAxis, recoAxis));
  return { study, trueAxis, recoAxis, tally, posterior };
}

export function flagOf(audit: Audit, id: FlagId, place: string | null): Flag {
  const found = audit.flags.filter((flag) => flag.id === id && (flag.column ?? flag.bin) === place);
  if (found.length !== 1) throw new Error(`${found.length} flags "${id}" at ${place}`);
  return found[0]!;
}

export function auditMade(cells: Omit<CampaignCells, 'columnNames' | 'outcomeNames'>, given: Given = {}): Audit {
  return auditOf(inputOf(cells, given));
}

/** The ensemble's own sampler, as the processes hand it to the audit. */
export const sampler: MatrixSampler = (from, seed) => {
  const plan = planEnsemble(from);
  return (block, replicas, out) => drawBlock(plan, seed, block, replicas, out);
};
