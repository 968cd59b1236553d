import { columnMoments } from '../posterior/share-moments';
import { binRange, type NumericAxis } from '../study/axis';
import { outcomePlaces, type AuditInput } from './audit-input';
import { intervalOfDraws } from './draws';
import type { Findings } from './findings';
import type { MatrixWatcher } from './matrix-draws';
import { listMeasure, type Reading } from './measure';
import { differences, NO_CENTRE, NOTHING_IN_WINDOW, whyNoDifference, windowResponse } from './window-response';

/** The central part of a response whose half-width is its resolution: that of a normal law within one sd. */
const CENTRAL = 0.6826894921370859;

export interface ResolutionWatcher extends MatrixWatcher {
  result(): Findings;
}

/**
 * Resolution of every column: half the width of the central 68.3 % of `r - t` over the window (`r / t - 1` on a log true
 * axis), from bin contents spread evenly inside each bin. The value is that of the mean response, the interval that of the
 * replicas watched. Never much below the bin width. It has no limit and so no flag.
 */
export function resolutionWatcher(input: AuditInput, replicas: number): ResolutionWatcher {
  const reason = whyNoDifference(input);
  if (reason !== null) {
    return {
      watch: () => undefined,
      result: () => ({ columns: { resolution: { value: null, reason } }, flags: [] }),
    };
  }
  const [trueAxis, { edges }] = [input.trueAxis as NumericAxis, input.recoAxis as NumericAxis];
  const offsets = input.tally.columnNames.map((_, j) => differences(trueAxis, j, edges));
  const { window } = outcomePlaces(input);
  const { first, end } = binRange(trueAxis);
  const draws = offsets.map((_, j) => new Float64Array(j >= first && j < end ? replicas : 0));
  let watched = 0;
  return {
    watch: (matrix) => {
      for (let j = first; j < end; j++) {
        const from = j * input.posterior.outcomes + window[0]!;
        draws[j]![watched] = centralHalfWidth(matrix.subarray(from, from + window.length), offsets[j]!);
      }
      watched++;
    },
    result: () => resolutionOf(input, offsets, draws),
  };
}

function resolutionOf(input: AuditInput, offsets: (Float64Array | null)[], draws: Float64Array[]): Findings {
  const readings = offsets.map((edges, j): Reading => {
    if (!edges) return { reason: NO_CENTRE };
    const response = windowResponse(input, j);
    if (!response) return { reason: NOTHING_IN_WINDOW };
    const value = centralHalfWidth(columnMoments(response.shape, response.scale).mean, edges);
    return { value, ...intervalOfDraws(draws[j]!, input.study.credibility) };
  });
  return { columns: { resolution: listMeasure(input.tally.columnNames, readings) }, flags: [] };
}

/** Half the distance between the two quantiles of binned content that hold `CENTRAL` of it between them. */
export function centralHalfWidth(contents: Float64Array, edges: Float64Array): number {
  const total = contents.reduce((sum, x) => sum + x, 0);
  const tail = (1 - CENTRAL) / 2;
  return (quantileOfBinned(contents, edges, (1 - tail) * total) - quantileOfBinned(contents, edges, tail * total)) / 2;
}

function quantileOfBinned(contents: Float64Array, edges: Float64Array, content: number): number {
  let below = 0;
  for (let k = 0; k < contents.length; k++) {
    if (below + contents[k]! >= content && contents[k]! > 0) {
      return edges[k]! + ((content - below) / contents[k]!) * (edges[k + 1]! - edges[k]!);
    }
    below += contents[k]!;
  }
  return edges[edges.length - 1]!;
}
