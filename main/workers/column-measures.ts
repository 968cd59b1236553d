import { outcomePlaces } from '../../src/audit/audit-input';
import { columnShares, type ColumnShare } from '../../src/audit/column-share';
import { LOSSES_UNRECORDED } from '../../src/audit/loss';
import { shareInterval } from '../../src/posterior/intervals';
import { matchedDirichlet } from '../../src/posterior/matched-dirichlet';
import { momentsOf, type Marginal } from '../../src/posterior/marginal';
import { hasNoPosterior } from '../../src/posterior/posterior';
import { axesMatch, binRange } from '../../src/study/axis';
import { rowSums } from '../../src/tally/tally';
import type { Estimates, TallyView } from '../bridge';
import type { Analysis } from './matrix-task';

/** What the axes stage shows of every column while an edge is dragged. */
export type ColumnMeasures = Pick<
  TallyView,
  'population' | 'effective' | 'efficiency' | 'acceptance' | 'stability' | 'absent'
>;

const AXES_DIFFER = 'stability needs the same edges (or tags) on both axes';

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
    absent: { ...(lost === null && { efficiency: LOSSES_UNRECORDED }), ...(!matching && { stability: AXES_DIFFER }) },
  };
}

function estimates(shares: (ColumnShare | null)[]): Estimates {
  const list = (pick: (share: ColumnShare) => number): Float64Array =>
    Float64Array.from(shares, (share) => (share ? pick(share) : NaN));
  return { value: list(({ mean }) => mean), lower: list(({ lower }) => lower), upper: list(({ upper }) => upper) };
}

/** Share of a column's window content that stays in the matching bin; NaN for `below` and `above`, which have none. */
function stability({ posterior, tally, trueAxis, study }: Analysis, window: readonly number[]): Estimates {
  const { columns, outcomes } = posterior;
  const [value, lower, upper] = Array.from({ length: 3 }, () => new Float64Array(columns).fill(NaN)) as Triple;
  const { first, end } = binRange(trueAxis);
  for (let j = first; j < end; j++) {
    if (hasNoPosterior(posterior, j)) continue;
    const events = tally.cells.events.subarray(j * outcomes, (j + 1) * outcomes);
    const shape = matchedDirichlet(posterior, j);
    const sum = (of: Float64Array): number => window.reduce((total, k) => (k === j ? total : total + of[k]!), 0);
    const marginal: Marginal = { a: shape[j]!, b: sum(shape), method: 'exact' };
    if (marginal.a + marginal.b === 0) continue;
    const interval = shareInterval(marginal, events[j]!, sum(events), study.credibility);
    [value[j], lower[j], upper[j]] = [momentsOf(marginal).mean, interval.lower, interval.upper];
  }
  return { value, lower, upper };
}

type Triple = [Float64Array, Float64Array, Float64Array];
