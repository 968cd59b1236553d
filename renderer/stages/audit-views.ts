/** What the audit shows: its answers first, then what lies behind them. */
export type AuditView =
  'flags' | 'measures' | 'table' | 'influence' | 'drift' | 'conditioning' | 'prior' | 'rehearsal' | 'comparison';

export const AUDIT_VIEWS: readonly { name: AuditView; title: string }[] = [
  { name: 'flags', title: 'Flags' },
  { name: 'measures', title: 'Measures' },
  { name: 'table', title: 'Tables' },
  { name: 'influence', title: 'Influence' },
  { name: 'drift', title: 'Drift' },
  { name: 'conditioning', title: 'Conditioning' },
  { name: 'prior', title: 'Prior' },
  { name: 'rehearsal', title: 'Rehearsal' },
  { name: 'comparison', title: 'Comparison' },
];
