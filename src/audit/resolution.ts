import { PURPOSE, streamOf, type RandomStream } from '../numerics/random';
import { columnMoments } from '../posterior/share-moments';
import type { NumericAxis } from '../study/axis';
import type { AuditInput } from './audit-input';
import { intervalOfDraws } from './draws';
import type { Findings } from './findings';
import { auditReplicas } from './matrix-draws';
import { listMeasure, type Reading } from './measure';
import {
  differences,
  NO_CENTRE,
  NOTHING_IN_WINDOW,
  whyNoDifference,
  windowResponse,
  type WindowResponse,
} from './window-response';

/** The central part of a response whose half-width is its resolution: that of a normal law within one sd. */
const CENTRAL = 0.6826894921370859;

/**
 * Resolution of every column: half the width of the central 68.3 % of `r - t` over the window (`r / t - 1` on a log true
 * axis), from bin contents spread evenly inside each bin. The value is that of the mean response; interval from draws of
 * the column's posterior. Never much below the bin width. It has no limit and so no flag.
 */
export function auditResolution(input: AuditInput): Findings {
  const reason = whyNoDifference(input);
  if (reason !== null) return { columns: { resolution: { value: null, reason } }, flags: [] };
  const [trueAxis, { edges }] = [input.trueAxis as NumericAxis, input.recoAxis as NumericAxis];
  const readings = input.tally.columnNames.map((_, j) => resolutionReading(input, j, differences(trueAxis, j, edges)));
  return { columns: { resolution: listMeasure(input.tally.columnNames, readings) }, flags: [] };
}

function resolutionReading(input: AuditInput, j: number, edges: Float64Array | null): Reading {
  if (!edges) return { reason: NO_CENTRE };
  const response = windowResponse(input, j);
  if (!response) return { reason: NOTHING_IN_WINDOW };
  const value = centralHalfWidth(columnMoments(response.shape, response.scale).mean, edges);
  const stream = streamOf(input.study.ensemble.seed, PURPOSE.resolution, j, 0);
  const contents = new Float64Array(response.shape.length);
  const draws = new Float64Array(auditReplicas(input.posterior)).map(() => {
    drawContents(stream, response, contents);
    return centralHalfWidth(contents, edges);
  });
  return { value, ...intervalOfDraws(draws, input.study.credibility) };
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

/** Gamma variates in proportion to a draw of the response; again where tiny shapes make all of them underflow. */
function drawContents(stream: RandomStream, { shape, scale }: WindowResponse, out: Float64Array): void {
  let total = 0;
  while (!(total > 0)) {
    for (let k = 0; k < shape.length; k++) {
      out[k] = shape[k]! > 0 ? stream.gamma(shape[k]!) * (scale ? scale[k]! : 1) : 0;
      total += out[k]!;
    }
  }
}
