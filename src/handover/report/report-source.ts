import { createHash } from 'node:crypto';
import { readFileSync } from 'node:fs';
import { join } from 'node:path';
import type { Audit } from '../../audit/audit';
import type { DeepAudit } from '../../audit/deep-audit';
import { priorSensitivityOf, type PriorSensitivity } from '../../audit/prior-sensitivity';
import { parseJson } from '../../study/study';
import type { Analysis } from '../analyse';
import { analyseBundle } from '../bundle-tally';
import type { Bundle } from '../open-bundle';
import { MANIFEST } from '../write-bundle';
import { planNext, type MeasurePlan } from './measure-next';
import { bandNamer } from './places';
import { columnVerdicts, type ColumnVerdict } from './verdicts';

/** Everything that a report is written from. */
export interface ReportSource {
  bundle: Bundle;
  analysis: Analysis;
  flags: Audit['flags'];
  measures: Audit['measures'];
  deep: DeepAudit;
  sensitivity: PriorSensitivity;
  verdicts: ColumnVerdict[];
  plan: MeasurePlan;
  /** SHA-256 of the manifest, which names every other file. */
  manifestHash: string;
  /** Whether the audit worked out again is the one that the bundle holds: another version may judge otherwise. */
  isSameAudit: boolean;
  /** Names of columns and outcomes in words, by index. */
  column: (j: number) => string;
  outcome: (k: number) => string;
}

/** Works out what a report of a bundle needs. Throws `InputError` where the bundle is damaged. */
export function reportSource(bundle: Bundle): ReportSource {
  const analysis = analyseBundle(bundle);
  const { flags, measures } = analysis.audit;
  const deep = analysis.audit.deep!;
  const text = (name: string): string => readFileSync(join(bundle.folder, name), 'utf8');
  return {
    bundle,
    analysis,
    flags,
    measures,
    deep,
    sensitivity: priorSensitivityOf(analysis),
    verdicts: columnVerdicts(bundle.columns, flags),
    plan: planNext(analysis, analysis.reference, deep.influence, flags),
    manifestHash: createHash('sha256').update(text(MANIFEST)).digest('hex'),
    isSameAudit: isSame(flags, parseJson(text('flags.json'), join(bundle.folder, 'flags.json'))),
    column: bandNamer(analysis.trueAxis),
    outcome: bandNamer(analysis.recoAxis),
  };
}

function isSame(computed: unknown, stored: unknown): boolean {
  return JSON.stringify(computed) === JSON.stringify(stored);
}
