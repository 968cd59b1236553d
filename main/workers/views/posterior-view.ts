import type { PosteriorView } from '../../bridge';
import type { Analysis } from '../analysis';

/** The posterior of every cell as the window shows it; `seconds` is left to the caller. */
export function posteriorView(analysis: Analysis): PosteriorView {
  const { posterior, prior } = analysis;
  const { columns, outcomes, effective } = posterior;
  const { mean, sd, lower, upper, method } = analysis.summary();
  const priorMean = new Float64Array(columns * outcomes);
  const priorShare = new Float64Array(columns);
  for (let j = 0; j < columns; j++) {
    const counts = prior.counts.subarray(j * outcomes, (j + 1) * outcomes);
    const total = counts.reduce((sum, count) => sum + count, 0);
    if (total > 0)
      priorMean.set(
        counts.map((count) => count / total),
        j * outcomes,
      );
    // A column without events and without prior rests on nothing; it has no posterior, and says so by its method.
    priorShare[j] = total + effective[j]! > 0 ? total / (total + effective[j]!) : 0;
  }
  const { strength, grid, logEvidence } = prior.neighbours ?? { strength: null, grid: null, logEvidence: null };
  const kappa = strength === null || !grid ? null : { value: strength, grid, logEvidence };
  const cells = { mean, sd, lower, upper, prior: prior.counts, priorMean };
  return { columns, outcomes, ...cells, effective, priorShare, methods: method, kappa, seconds: 0 };
}
