import { outcomePlaces } from '../../../src/audit/audit-input';
import { columnShare, columnShares, type ColumnShare } from '../../../src/audit/column-share';
import { LOSSES_UNRECORDED } from '../../../src/audit/loss';
import { NO_MATCHING_BINS } from '../../../src/audit/stability';
import { axesMatch, binRange } from '../../../src/study/axis';
import { rowSums } from '../../../src/tally/tally';
import type { Estimates, TallyView } from '../../bridge';
import type { Analysis } from '../analysis';

/** What the axes stage shows of every column while an edge is dragged. */
export type ColumnMeasures = Pick<
  TallyView,
  'population' | 'effective' | 'efficiency' | 'acceptance' | 'stability' | 'absent'
>;

/** Population, efficiency, acceptance and stability of every column, with the study's intervals. */
export function columnMeasures(analysis: Analysis): ColumnMeasures {
  const { tally, posterior, trueAxis, recoAxis } = analysis;
  const { lost, window } = outcomePlaces(analysis);
  const kept = tally.outcomeNames.map((_, k) => k).filter((k) => k !== lost);
  const matching = axesMatch(trueAxis, recoAxis);
  return {
    population: rowSums(tally.cells.events, tally.outcomeNames.length),
    effective: posterior.effective,
    efficiency: lost === null ? null : estimates(columnShares(analysis, kept)),
    acceptance: estimates(columnShares(analysis, window)),
    stability: matching ? stability(analysis, window) : null,
    absent: {
      ...(lost === null && { efficiency: LOSSES_UNRECORDED }),
      ...(!matching && { stability: NO_MATCHING_BINS }),
    },
  };
}

function estimates(shares: (ColumnShare | null)[]): Estimates {
  const list = (pick: (share: ColumnShare) => number): Float64Array =>
    Float64Array.from(shares, (share) => (share ? pick(share) : NaN));
  return { value: list(({ mean }) => mean), lower: list(({ lower }) => lower), upper: list(({ upper }) => upper) };
}

/** Share of a column's window content that stays in the matching bin; NaN for `below` and `above`, which have none. */
function stability(analysis: Analysis, window: readonly number[]): Estimates {
  const { first, end } = binRange(analysis.trueAxis);
  return estimates(
    analysis.tally.columnNames.map((_, j) => (j < first || j >= end ? null : columnShare(analysis, j, [j], window))),
  );
}
