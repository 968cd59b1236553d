import type { AuditView } from '../../../main/bridge';
import type { KnownMatrix } from '../../bench/results.svelte';

/** What every view of the audit is given. */
export interface ViewProps {
  matrix: KnownMatrix;
  audit: AuditView;
}
