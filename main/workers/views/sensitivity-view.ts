import { priorSensitivityOf } from '../../../src/audit/prior-sensitivity';
import type { Flag } from '../../../src/audit/flag';
import type { PriorSensitivityView } from '../../bridge';
import type { Analysis } from '../analysis';

/** The study under the usual priors side by side. */
export function sensitivityView(analysis: Analysis): PriorSensitivityView {
  const { columnNames, outcomeNames } = analysis.tally;
  const { priors, largest } = priorSensitivityOf(analysis);
  return {
    columnNames,
    priors: priors.map(({ name, mean, sd, flags, change, changed }) => ({
      name,
      mean,
      sd,
      flags: { flagged: countOf(flags, 'flagged'), undecided: countOf(flags, 'undecided') },
      change,
      changed,
    })),
    largest: largest && {
      prior: largest.prior,
      column: columnNames.indexOf(largest.column),
      outcome: outcomeNames.indexOf(largest.outcome),
      inSd: largest.inSd,
    },
    seconds: 0,
  };
}

function countOf(flags: readonly Flag[], state: Flag['state']): number {
  return flags.filter((flag) => flag.state === state).length;
}
