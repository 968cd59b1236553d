import { auditAcceptance } from './acceptance';
import type { AuditInput } from './audit-input';
import { auditBackground } from './background';
import { auditBias } from './bias';
import { deepAudit, type AuditSources, type DeepAudit } from './deep-audit';
import { auditDuplicate } from './duplicate';
import type { BinMeasure, ColumnMeasure, Findings, MatrixMeasure } from './findings';
import { FLAG_IDS, type Flag } from './flag';
import { auditLoss } from './loss';
import type { Measure } from './measure';
import { auditNegativeWeight } from './negative-weight';
import { auditNonMonotone } from './non-monotone';
import { auditPopulation } from './population';
import { auditSingleEvent } from './single-event';
import { auditSpill } from './spill';
import { auditStability } from './stability';

/** The audit of a matrix: its measures as `audit.json` holds them, and every flag, clear ones included, in table order. */
export interface Audit {
  measures: {
    columns: Partial<Record<ColumnMeasure, Measure>>;
    bins: Partial<Record<BinMeasure, Measure>>;
    matrix: Partial<Record<MatrixMeasure, Measure>>;
  };
  flags: Flag[];
  /** What stands behind the measures that rest on a reference spectrum or on sampled matrices; `null` without sources. */
  deep: DeepAudit | null;
}

export type { AuditInput } from './audit-input';

/** The parts that need the tally and the posterior alone. */
const PARTS: ((input: AuditInput) => Findings)[] = [
  auditPopulation,
  auditLoss,
  auditAcceptance,
  auditSpill,
  auditStability,
  auditBias,
  auditNonMonotone,
  auditSingleEvent,
  auditNegativeWeight,
  auditDuplicate,
  auditBackground,
];

/**
 * Every measure and flag of a matrix. Without `sources` those are left out that rest on a reference spectrum or on sampled
 * matrices: purity, resolution, slope bias, drift, feed-in, influence and conditioning.
 */
export function auditOf(input: AuditInput, sources: AuditSources | null = null): Audit {
  const deep = sources && deepAudit(input, sources);
  const findings = PARTS.map((part) => part(input));
  if (deep) findings.push(deep.findings);
  return {
    measures: {
      columns: Object.assign({}, ...findings.map(({ columns }) => columns)),
      bins: Object.assign({}, ...findings.map(({ bins }) => bins)),
      matrix: Object.assign({}, ...findings.map(({ matrix }) => matrix)),
    },
    flags: inTableOrder(findings.flatMap(({ flags }) => flags)),
    deep,
  };
}

/** By id as the table of flags has them, at each id by place. */
function inTableOrder(flags: Flag[]): Flag[] {
  return FLAG_IDS.flatMap((id) => flags.filter((flag) => flag.id === id));
}
