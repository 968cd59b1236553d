import type { AuditInput } from './audit-input';
import { countFlag } from './count-flag';
import type { Findings } from './findings';
import { formatCount } from './wording';

/** The flag `duplicate`, of the event list as a whole. There is none where no event id is read. */
export function auditDuplicate({ tally }: AuditInput): Findings {
  const { duplicates } = tally;
  if (!duplicates) return { flags: [] };
  const { identities, rows, examples } = duplicates;
  const first = examples[0] ? `, first ${examples[0].join(' and ')}` : '';
  const seen = `${formatCount(identities)} event ids repeat, ${formatCount(rows)} rows too many${first}`;
  const flag = countFlag({
    id: 'duplicate',
    column: null,
    value: rows,
    limit: 0,
    isBeyond: identities > 0,
    evidence: identities > 0 ? seen : 'no event id repeats',
    remedy: `take the ${formatCount(rows)} rows out: a row counted twice narrows intervals without cause, and no further event mends that`,
  });
  return { flags: [flag] };
}
