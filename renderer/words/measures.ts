import type { BinMeasure, ColumnMeasure } from '../../main/bridge';
import type { Axis } from '../../src/study/axis';
import type { Limits } from '../../src/study/study';

export interface MeasureWords {
  title: string;
  unit: (axis: Axis) => string;
  /** What it is, in one sentence. */
  means: string;
  /** The limit it is held against; `beyond` is where it is flagged. */
  limit: keyof Limits | null;
  beyond: 'below' | 'above';
  log?: boolean;
  /** A share of one: drawn on the scale from 0 to 1 where it spans much of it. */
  share?: boolean;
}

const none = () => '';

export const COLUMN_MEASURES: Record<ColumnMeasure, MeasureWords> = {
  effectiveEntries: {
    title: 'Effective entries',
    unit: none,
    means: 'The number of unit-weight events that would carry the same statistics.',
    limit: 'thin',
    beyond: 'below',
    log: true,
  },
  priorShare: {
    title: 'Prior share',
    unit: none,
    means: 'The part of the posterior that the prior brought, not the events.',
    limit: 'prior-led',
    beyond: 'above',
    share: true,
  },
  efficiency: {
    title: 'Efficiency',
    unit: none,
    means: 'Probability that an event of the column is reconstructed at all.',
    limit: 'lossy',
    beyond: 'below',
    share: true,
  },
  acceptance: {
    title: 'Acceptance',
    unit: none,
    means: 'Probability that an event of the column is reconstructed inside the window.',
    limit: null,
    beyond: 'below',
    share: true,
  },
  spillBelow: {
    title: 'Spill below',
    unit: none,
    means: 'Probability of being reconstructed below the window.',
    limit: 'spill-below',
    beyond: 'above',
    share: true,
  },
  spillAbove: {
    title: 'Spill above',
    unit: none,
    means: 'Probability of being reconstructed above the window.',
    limit: 'spill-above',
    beyond: 'above',
    share: true,
  },
  purity: {
    title: 'Purity',
    unit: none,
    means: 'Share of the matching reconstructed bin that was generated in this column.',
    limit: 'impure',
    beyond: 'below',
    share: true,
  },
  stability: {
    title: 'Stability',
    unit: none,
    means: 'Share of the column’s content in the window that stays in the matching bin.',
    limit: 'unstable',
    beyond: 'below',
    share: true,
  },
  bias: {
    title: 'Bias',
    unit: (axis) => axis.unit,
    means: 'Mean of reconstructed minus true value over the window.',
    limit: null,
    beyond: 'above',
  },
  resolution: {
    title: 'Resolution',
    unit: (axis) => axis.unit,
    means: 'Half width of the central 68 % of reconstructed minus true value.',
    limit: null,
    beyond: 'above',
  },
  slopeBias: {
    title: 'Slope bias',
    unit: () => 'sd',
    means:
      'Largest shift of a cell if the spectrum inside the bin were the reference one, in units of the cell’s own sd.',
    limit: 'slope-bias',
    beyond: 'above',
  },
  drift: {
    title: 'Run drift',
    unit: none,
    means: 'Largest total-variation distance of a run from all runs together.',
    limit: 'run-drift-distance',
    beyond: 'above',
    share: true,
  },
};

export const BIN_MEASURES: Record<BinMeasure, MeasureWords> = {
  feedIn: {
    title: 'Feed-in',
    unit: none,
    means: 'Share of the bin’s expected content that comes from outside the true window.',
    limit: 'feed-in',
    beyond: 'above',
    share: true,
  },
  folded: {
    title: 'Folded content',
    unit: () => 'events',
    means: 'Expected content of the bin under the reference spectrum.',
    limit: null,
    beyond: 'above',
  },
  matrixVariance: {
    title: 'Variance from the matrix',
    unit: () => 'events²',
    means: 'Variance of the folded content that comes from the calibration statistics.',
    limit: null,
    beyond: 'above',
  },
  dataVariance: {
    title: 'Poisson variance of the data',
    unit: () => 'events²',
    means: 'Variance that the data to come will have by themselves.',
    limit: null,
    beyond: 'above',
  },
  background: {
    title: 'Background',
    unit: () => 'events',
    means: 'Content of the bin from rows without a true value, apart from every column.',
    limit: null,
    beyond: 'above',
  },
};
