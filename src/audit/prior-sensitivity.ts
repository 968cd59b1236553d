import { hasNoPosterior, posteriorOf } from '../posterior/posterior';
import { priorOf } from '../posterior/prior';
import { summarise, type Summary } from '../posterior/summary';
import type { Prior } from '../study/study';
import { auditOf } from './audit';
import type { AuditInput } from './audit-input';
import type { Flag, FlagState } from './flag';

/** The priors set side by side. */
export const COMPARED_PRIORS: readonly { name: string; prior: Prior }[] = [
  { name: 'flat', prior: { pseudoCount: 1 } },
  { name: 'Jeffreys', prior: { pseudoCount: 0.5 } },
  { name: 'shared total', prior: { pseudoTotal: 1 } },
  { name: 'neighbours', prior: { neighbours: {} } },
];

/** What a study would say under another prior. */
export interface UnderPrior {
  name: string;
  prior: Prior;
  /** `[columns, outcomes]`. */
  mean: Float64Array;
  sd: Float64Array;
  /** Flags that rest on the tally and the posterior alone; see `auditOf` without sources. */
  flags: Flag[];
  /** Those whose answer differs from the study's own. */
  changed: { id: Flag['id']; column: string | null; bin: string | null; from: FlagState; to: FlagState }[];
  /** `[columns]`: largest change of a mean, in units of the study's own sd of that cell; 0 in a column without posterior. */
  change: Float64Array;
}

export interface PriorSensitivity {
  priors: UnderPrior[];
  /** The largest change of all; `null` where no prior changes any mean. */
  largest: { prior: string; column: string; outcome: string; from: number; to: number; inSd: number } | null;
}

/** The study under flat, Jeffreys, shared-total and neighbour prior side by side, against its own prior. */
export function priorSensitivityOf(input: AuditInput): PriorSensitivity {
  const own = summarise(input.posterior, input.tally.cells.events, input.study.credibility);
  const ownFlags = auditOf(input).flags;
  const priors: UnderPrior[] = [];
  let largest: PriorSensitivity['largest'] = null;
  for (const { name, prior } of COMPARED_PRIORS) {
    const { tally, trueAxis, recoAxis, study } = input;
    const posterior = posteriorOf(tally.cells, priorOf(prior, tally, trueAxis, recoAxis));
    const { mean, sd } = summarise(posterior, tally.cells.events, study.credibility);
    const cells = largestChanges(input, own, mean);
    const flags = auditOf({ ...input, posterior }).flags;
    const changed = changedFlags(ownFlags, flags);
    priors.push({ name, prior, mean, sd, flags, changed, change: Float64Array.from(cells, ({ inSd }) => inSd) });
    const worst = cells.reduce((a, b) => (b.inSd > a.inSd ? b : a));
    if (worst.inSd > (largest?.inSd ?? 0)) largest = { prior: name, ...placeOf(input, worst, own.mean, mean) };
  }
  return { priors, largest };
}

interface Change {
  cell: number;
  inSd: number;
}

/** The cell of each column whose mean changes most. */
function largestChanges({ posterior }: AuditInput, own: Summary, mean: Float64Array): Change[] {
  const { columns, outcomes } = posterior;
  return Array.from({ length: columns }, (_, j) => {
    let most = { cell: j * outcomes, inSd: 0 };
    if (hasNoPosterior(posterior, j)) return most;
    for (let i = j * outcomes; i < (j + 1) * outcomes; i++) {
      const inSd = own.sd[i]! > 0 ? Math.abs(mean[i]! - own.mean[i]!) / own.sd[i]! : 0;
      if (inSd > most.inSd) most = { cell: i, inSd };
    }
    return most;
  });
}

function placeOf({ tally, posterior }: AuditInput, { cell, inSd }: Change, from: Float64Array, to: Float64Array) {
  const column = tally.columnNames[Math.floor(cell / posterior.outcomes)]!;
  const outcome = tally.outcomeNames[cell % posterior.outcomes]!;
  return { column, outcome, from: from[cell]!, to: to[cell]!, inSd };
}

/** The same flags stand at the same places under every prior: they depend on axes and limits alone. */
function changedFlags(own: Flag[], other: Flag[]): UnderPrior['changed'] {
  return other.flatMap(({ id, column, bin, state }, i) => {
    const from = own[i]!.state;
    return from === state ? [] : [{ id, column, bin, from, to: state }];
  });
}
