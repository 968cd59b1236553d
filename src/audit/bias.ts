import { equalTailed } from '../posterior/intervals';
import { matchedBeta } from '../posterior/marginal';
import { linearMoments } from '../posterior/share-moments';
import type { NumericAxis } from '../study/axis';
import type { AuditInput } from './audit-input';
import type { Findings } from './findings';
import { listMeasure, type Reading } from './measure';
import {
  binCentres,
  differences,
  NO_CENTRE,
  NOTHING_IN_WINDOW,
  whyNoDifference,
  windowResponse,
} from './window-response';

/**
 * Bias of every column: the mean of `r - t` over the window (`r / t - 1` on a log true axis) with `r` and `t` the centres
 * of the bins. Mean and variance are exact; the interval is that of a Beta of that mean and variance, stretched over the
 * range that the mean can have. It has no limit and so no flag.
 */
export function auditBias(input: AuditInput): Findings {
  const reason = whyNoDifference(input);
  if (reason !== null) return { columns: { bias: { value: null, reason } }, flags: [] };
  const [trueAxis, centres] = [input.trueAxis as NumericAxis, binCentres(input.recoAxis as NumericAxis)];
  const readings = input.tally.columnNames.map((_, j) => biasReading(input, j, differences(trueAxis, j, centres)));
  return { columns: { bias: listMeasure(input.tally.columnNames, readings) }, flags: [] };
}

function biasReading(input: AuditInput, j: number, offsets: Float64Array | null): Reading {
  if (!offsets) return { reason: NO_CENTRE };
  const response = windowResponse(input, j);
  if (!response) return { reason: NOTHING_IN_WINDOW };
  const { mean, variance } = linearMoments(response.shape, response.scale, offsets);
  const [least, width] = [offsets[0]!, offsets[offsets.length - 1]! - offsets[0]!];
  const stretched = matchedBeta({ mean: (mean - least) / width, variance: variance / width ** 2 });
  const { lower, upper } = equalTailed(stretched, input.study.credibility);
  return { value: mean, lower: least + width * lower, upper: least + width * upper };
}
