import { binRange } from '../study/axis';
import { gammaQuantile } from '../numerics/gamma-quantile';
import type { AuditInput } from './audit-input';
import type { Findings } from './findings';
import { listMeasure, type Reading } from './measure';

/** Jeffreys' prior of a Poisson mean is a Gamma of shape 1/2. */
const JEFFREYS = 0.5;

/**
 * Content of each reconstructed bin from rows without a true value: its Gamma posterior, apart from every column. `n`
 * events give `Gamma(n + 1/2)` (Jeffreys); weights `W`, squares `V` give `Gamma(W^2/V + 1/2)` times `V/W`, a scaled
 * Poisson (Bohm & Zech, NIM A 748 (2014) 1, memory), or times the mean weight scale of all bins where a bin has no
 * positive weight. A bin without events shows an upper limit. Absent where the study rejects such rows.
 */
export function auditBackground({ study, tally, recoAxis }: AuditInput): Findings {
  const { unmatched, outcomeNames } = tally;
  if (!unmatched) {
    const reason = 'rows without a true value are rejected; the study can count them ("unmatched": "count")';
    return { bins: { background: { value: null, reason } }, flags: [] };
  }
  const { first, end } = binRange(recoAxis);
  const places = outcomeNames.slice(first, end);
  const common = meanScale(unmatched);
  const readings = places.map((_, i) => readingOf(unmatched, first + i, common, study.credibility));
  return { bins: { background: listMeasure(places, readings) }, flags: [] };
}

type Contents = NonNullable<AuditInput['tally']['unmatched']>;

function readingOf({ events, weights, squares }: Contents, k: number, common: number, credibility: number): Reading {
  const [w, v] = weights && squares ? [weights[k]!, squares[k]!] : [events[k]!, events[k]!];
  const positive = w > 0;
  const shape = (positive ? w ** 2 / v : 0) + JEFFREYS;
  const scale = positive ? v / w : common;
  const quantile = (p: number): number => scale * gammaQuantile(p, shape);
  const tail = (1 - credibility) / 2;
  return {
    value: scale * shape,
    lower: positive ? quantile(tail) : 0,
    upper: positive ? quantile(1 - tail) : quantile(credibility),
  };
}

/** `sum V / sum W` over the outcomes with positive weight; 1 where there is none. */
function meanScale({ weights, squares }: Contents): number {
  let [w, v] = [0, 0];
  weights?.forEach((weight, k) => {
    if (!(weight > 0)) return;
    w += weight;
    v += squares![k]!;
  });
  return w > 0 ? v / w : 1;
}
