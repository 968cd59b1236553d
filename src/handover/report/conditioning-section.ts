import type { ListedMeasure } from '../../audit/measure';
import { formatCount, formatNumber, formatPercent } from '../../audit/wording';
import { binCount } from '../../study/axis';
import { evenBands } from './bands';
import { ACROSS } from './cell-picture';
import { markup, Markup } from './markup';
import { endsFor, measurePicture } from './measure-picture';
import type { ReportSource } from './report-source';
import { figure, ifMeasured, type Section } from './section';

/** Whether the matrix can be inverted at all. */
export const conditioningSection: Section = { id: 'conditioning', title: 'Conditioning', body: conditioning };

function conditioning(source: ReportSource): Markup {
  const { singularValues } = source.deep.conditioning;
  return ifMeasured(singularValues, (measure) => markup`${picture(source, measure)}${words(source)}`);
}

/** Singular values below this part of the largest are rounding. */
const ROUNDING = 1e-12;

function picture({ deep, analysis }: ReportSource, measure: ListedMeasure): Markup {
  const noise = deep.conditioning.noise!;
  const shown = { ...measure, value: measure.value.map((s) => (s! > ROUNDING * measure.value[0]! ? s : null)) };
  const labels = measure.value.map((_, i) => String(i + 1));
  const values = measurePicture({
    name: 'Singular values',
    across: evenBands(labels, 0, ACROSS, 'component'),
    measure: shown,
    title: 'singular value',
    kind: 'log',
    ...endsFor({ ...shown, lower: [], upper: [] }, 'log', [noise]),
    limit: { value: noise, text: `noise level ${formatNumber(noise, 2)}` },
    height: 150,
  });
  return figure(
    values,
    markup`<b>Singular values</b> of the window part of the mean matrix (true bins by reconstructed bins), with ${formatPercent(analysis.study.credibility)} intervals over ${formatCount(deep.conditioning.replicas.intervals)} replicas; dashed: the noise level. Noise lifts the small ones in every replica: an interval wholly above its value is one that is not resolved.`,
  );
}

function words({ deep, analysis, flags }: ReportSource): Markup {
  const { noise, resolvable, replicas } = deep.conditioning;
  const found = (resolvable as ListedMeasure).value[0]!;
  const flag = flags.find(({ id }) => id === 'ill-conditioned');
  return markup`<p>The noise level ${formatNumber(noise!, 2)} is the 95 % quantile of the spectral norm of (replica − mean) over ${formatCount(replicas.noise)} replicas: by Weyl's inequality no singular value moves by more. ${formatCount(found)} of ${formatCount(binCount(analysis.trueAxis))} components stand above it and can be resolved. ${flag && flag.advice !== '' ? `What to do: ${flag.advice}.` : ''}</p>`;
}
