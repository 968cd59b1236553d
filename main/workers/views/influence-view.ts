import { InputError } from '../../../src/study/input-error';
import { isAbsent, type Measure } from '../../../src/audit/measure';
import { binRange } from '../../../src/study/axis';
import type { InfluenceView } from '../../bridge';
import type { Audited } from '../analysis';

/** The influence of the matrix on the reference spectrum, as the window draws it. Throws `InputError` where it has no meaning. */
export function influenceView({ deep, reference, analysis }: Audited): InfluenceView {
  const { columnNames, outcomeNames } = analysis.tally;
  const { first, end } = binRange(analysis.recoAxis);
  const { folded, matrixVariance, dataVariance, contributions, ranking } = deep!.influence;
  if (isAbsent(folded) || !contributions) {
    const reason = isAbsent(folded) ? folded.reason : 'not measured';
    throw new InputError('influence', reason, 'choose another reference spectrum, or read more events');
  }
  const share = new Map(ranking.map((entry) => [entry.column, entry.share]));
  return {
    reference: reference.contents,
    columnNames,
    binNames: outcomeNames.slice(first, end),
    folded: valuesOf(folded),
    matrixVariance: valuesOf(matrixVariance),
    dataVariance: valuesOf(dataVariance),
    shares: sharesOf(contributions, columnNames.length, end - first),
    columnShare: Float64Array.from(columnNames, (name) => share.get(name) ?? 0),
    ranking: ranking.map(({ column }) => columnNames.indexOf(column)),
    seconds: 0,
  };
}

function valuesOf(measure: Measure): Float64Array {
  return isAbsent(measure) ? new Float64Array(0) : Float64Array.from(measure.value, (value) => value ?? NaN);
}

/** `[bins, columns]` from `[columns, bins]`, each bin's shares summing to 1; all 0 where a bin has no variance. */
function sharesOf(contributions: Float64Array, columns: number, bins: number): Float64Array {
  const shares = new Float64Array(bins * columns);
  for (let i = 0; i < bins; i++) {
    let all = 0;
    for (let j = 0; j < columns; j++) all += contributions[j * bins + i]!;
    for (let j = 0; j < columns; j++) shares[i * columns + j] = all > 0 ? contributions[j * bins + i]! / all : 0;
  }
  return shares;
}
