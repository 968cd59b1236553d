import { isAbsent } from '../../audit/measure';
import { formatCount, formatInterval, formatNumber, formatPercent } from '../../audit/wording';
import { binRange } from '../../study/axis';
import { axisBands, windowBands } from './bands';
import { ACROSS } from './cell-picture';
import { at } from './frame';
import { markup, Markup, tableOf } from './markup';
import { endsFor, measurePicture } from './measure-picture';
import type { ReportSource } from './report-source';
import { figure, ifMeasured, type Section } from './section';

/** The reference spectrum, what it makes of the matrix's uncertainty, and which columns it comes from. */
export const referenceSection: Section = {
  id: 'reference',
  title: 'The reference spectrum, and whether the calibration statistics is enough',
  body: reference,
};

function reference(source: ReportSource): Markup {
  const { analysis } = source;
  return markup`<p>Feed-in, purity, slope bias and influence rest on a reference spectrum: ${analysis.reference.description}. With another spectrum they are other numbers.</p>
${spectrum(source)}${folded(source)}${ratio(source)}${ranking(source)}${feedIn(source)}${background(source)}`;
}

function spectrum({ analysis }: ReportSource): Markup {
  const values = [...analysis.reference.contents].map((s) => (s > 0 ? s : null));
  const measure = { value: values, lower: [], upper: [] };
  const across = axisBands(analysis.trueAxis, false, ACROSS);
  const bars = measurePicture({
    name: 'Reference content of every column',
    across,
    measure,
    title: 'events',
    kind: 'log',
    ...endsFor(measure, 'log'),
    bars: true,
    height: 100,
  });
  return figure(bars, markup`<b>Reference spectrum</b>: generated events expected in every column, on a log scale.`);
}

function folded({ analysis, measures }: ReportSource): Markup {
  return ifMeasured(measures.bins.folded, (measure) => {
    const picture = measurePicture({
      name: 'Folded reference spectrum',
      across: windowBands(analysis.recoAxis, ACROSS),
      measure,
      title: 'events',
      kind: 'log',
      ...endsFor(measure, 'log'),
      height: 100,
    });
    return figure(
      picture,
      markup`<b>Folded reference spectrum</b>: expected content of every reconstructed bin; grey: the ${formatPercent(analysis.study.credibility)} interval that the matrix leaves it. Poisson fluctuations of data are not in it.`,
    );
  });
}

function ratio({ analysis, deep }: ReportSource): Markup {
  const limit = analysis.study.limits['matrix-limited'];
  return ifMeasured(deep.influence.ratio, (measure) => {
    const picture = measurePicture({
      name: 'Variance from the matrix over that of the data, every reconstructed bin',
      across: windowBands(analysis.recoAxis, ACROSS),
      measure,
      title: 'matrix / data variance',
      kind: 'log',
      ...endsFor(measure, 'log', [limit]),
      limit: { value: limit, text: `limit ${formatNumber(limit)}` },
    });
    return figure(
      picture,
      markup`<b>Influence</b>: variance of the folded content that the matrix causes, over the Poisson variance of the data to come. Above one, more data bring little: the calibration limits the result.`,
    );
  });
}

/** Columns listed in the ranking. */
const MOST_RANKED = 12;
const BAR = 120;

function ranking({ deep, bundle, column }: ReportSource): Markup | null {
  const ranked = deep.influence.ranking.filter(({ share }) => share > 0).slice(0, MOST_RANKED);
  if (ranked.length === 0) return null;
  const rows = ranked.map((one) => [
    column(bundle.columns.indexOf(one.column)),
    formatPercent(one.share, 2),
    markup`<svg class="rank" viewBox="0 0 ${BAR} 8" aria-hidden="true"><rect x="0" y="1" width="${at((BAR * one.share) / ranked[0]!.share)}" height="6"/></svg>`,
  ]);
  const left = deep.influence.ranking.length - ranked.length;
  return markup`<h3>Where more calibration events pay</h3><p>Share of each column in the ratios of all reconstructed bins${left > 0 ? `; the other ${formatCount(left)} columns have ${formatPercent(1 - ranked.reduce((sum, { share }) => sum + share, 0), 2)} together` : ''}.</p>
${tableOf(['Column', 'Share', ''], rows, { numeric: [1] })}`;
}

function feedIn({ measures, analysis }: ReportSource): Markup {
  const limit = analysis.study.limits['feed-in'];
  return ifMeasured(measures.bins.feedIn, (measure) => {
    const picture = measurePicture({
      name: 'Feed-in of every reconstructed bin',
      across: windowBands(analysis.recoAxis, ACROSS),
      measure,
      title: 'feed-in',
      kind: 'linear',
      ...endsFor(measure, 'linear', [0, limit * 1.1]),
      limit: { value: limit, text: `limit ${limit}` },
      height: 100,
    });
    return figure(
      picture,
      markup`<b>Feed-in</b>: share of a bin's expected content that was generated outside the true window.`,
    );
  });
}

/** Rows without a true value, where the study counts them. */
function background({ analysis, bundle, measures, outcome }: ReportSource): Markup | null {
  const { unmatched } = analysis.tally;
  const content = measures.bins.background;
  if (!unmatched || !content || isAbsent(content)) return null;
  const { first } = binRange(analysis.recoAxis);
  const rows = bundle.outcomes.flatMap((_, k) => {
    const n = unmatched.events[k]!;
    const [value, lower, upper] = [content.value, content.lower, content.upper].map((list) => list[k - first] ?? null);
    if (n === 0 && value === null) return [];
    const known = value !== null && lower !== null && upper !== null;
    return [[outcome(k), formatCount(n), known ? formatInterval(value!, lower!, upper!) : '–']];
  });
  return markup`<h3>Events without a true value</h3><p>Counted apart as background; they are in no column. Content: its Gamma posterior in the reconstructed bins, with the ${formatPercent(analysis.study.credibility)} interval.</p>${tableOf(['Outcome', 'Events', 'Content'], rows, { numeric: [1, 2] })}`;
}
