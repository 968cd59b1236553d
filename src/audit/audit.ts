import { auditAcceptance } from './acceptance';
import type { AuditInput } from './audit-input';
import { auditDuplicate } from './duplicate';
import type { BinMeasure, ColumnMeasure, Findings, MatrixMeasure } from './findings';
import type { Flag } from './flag';
import { auditLoss } from './loss';
import type { Measure } from './measure';
import { auditNegativeWeight } from './negative-weight';
import { auditPopulation } from './population';
import { auditSingleEvent } from './single-event';
import { auditSpill } from './spill';

/** The audit of a matrix: its measures as `audit.json` holds them, and every flag, clear ones included. */
export interface Audit {
  measures: {
    columns: Partial<Record<ColumnMeasure, Measure>>;
    bins: Partial<Record<BinMeasure, Measure>>;
    matrix: Partial<Record<MatrixMeasure, Measure>>;
  };
  flags: Flag[];
}

export type { AuditInput } from './audit-input';

const PARTS: ((input: AuditInput) => Findings)[] = [
  auditPopulation,
  auditLoss,
  auditAcceptance,
  auditSpill,
  auditSingleEvent,
  auditNegativeWeight,
  auditDuplicate,
];

/** Every measure and flag of a matrix. */
export function auditOf(input: AuditInput): Audit {
  const findings = PARTS.map((part) => part(input));
  return {
    measures: {
      columns: Object.assign({}, ...findings.map(({ columns }) => columns)),
      bins: Object.assign({}, ...findings.map(({ bins }) => bins)),
      matrix: Object.assign({}, ...findings.map(({ matrix }) => matrix)),
    },
    flags: findings.flatMap(({ flags }) => flags),
  };
}
