import type { Flag } from './flag';
import type { Measure } from './measure';

/** Measures by the names that `audit.json` has for them, over columns, over reconstructed bins, and of the matrix. */
export type ColumnMeasure =
  | 'effectiveEntries'
  | 'priorShare'
  | 'efficiency'
  | 'acceptance'
  | 'spillBelow'
  | 'spillAbove'
  | 'purity'
  | 'stability'
  | 'bias'
  | 'resolution'
  | 'slopeBias'
  | 'drift';
export type BinMeasure = 'feedIn' | 'folded' | 'matrixVariance' | 'dataVariance' | 'background';
export type MatrixMeasure = 'singularValues' | 'resolvable';

/** What one part of the audit found: its measures and the flags that rest on them. */
export interface Findings {
  columns?: Partial<Record<ColumnMeasure, Measure>>;
  bins?: Partial<Record<BinMeasure, Measure>>;
  matrix?: Partial<Record<MatrixMeasure, Measure>>;
  flags: Flag[];
}
