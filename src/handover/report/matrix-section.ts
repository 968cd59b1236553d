import { formatPercent } from '../../audit/wording';
import { axisBands } from './bands';
import { ACROSS, cellPicture } from './cell-picture';
import { GREYS, HATCHES, legendOf } from './frame';
import { markup, Markup } from './markup';
import { endsFor, measurePicture } from './measure-picture';
import type { ReportSource } from './report-source';
import { figure, type Section } from './section';

/** The matrix as it is known: population, mean, and how wide the intervals are. */
export const matrixSection: Section = { id: 'matrix', title: 'The matrix and its intervals', body: matrix };

/** Height of a matrix in a picture: two of them fit a page with their words. */
const HEIGHT = 300;
/** Shares at which the fill changes, a third of a decade each from the largest power of ten needed downwards. */
const STEPS = [1, 0.3, 0.1, 0.03, 0.01];

function matrix(source: ReportSource): Markup {
  const { analysis, bundle } = source;
  const { summary, trueAxis, recoAxis, tally } = analysis;
  const hasLost = bundle.manifest.lostRecorded;
  const across = axisBands(trueAxis, false, ACROSS);
  const up = axisBands(recoAxis, hasLost, HEIGHT, 'up');
  const { outcomes } = summary;
  const cell = (j: number, k: number): number => j * outcomes + k;
  const seen = (j: number, k: number): boolean => tally.cells.events[cell(j, k)]! > 0;
  const top = topOf(summary.mean);
  const levels = STEPS.map((share) => share * top);
  const mean = (j: number, k: number): number => levelOf(summary.mean[cell(j, k)]!, levels);
  const width = (j: number, k: number): number =>
    levelOf(summary.upper[cell(j, k)]! - summary.lower[cell(j, k)]!, levels);
  const level = formatPercent(analysis.study.credibility);
  return markup`${figure(
    cellPicture({
      name: 'Posterior mean of every cell',
      across,
      up,
      level: (j, k) => (seen(j, k) ? mean(j, k) : 0),
      fills: GREYS,
    }),
    markup`<b>Posterior mean</b> of p(outcome | true bin). White: below ${formatPercent(levels.at(-1)!)}, or no event. ${legend(levels, GREYS)}`,
  )}${figure(
    cellPicture({ name: 'Width of the interval of every cell', across, up, level: width, fills: HATCHES }),
    markup`<b>Width of the ${level} interval</b> of the same cells, empty ones included: the denser the hatching, the less is known. ${legend(levels, HATCHES)}`,
  )}${population(source)}`;
}

/** 1, or the power of ten that a fine matrix stays below. */
function topOf(mean: Float64Array): number {
  const most = mean.reduce((a, b) => Math.max(a, b), 0);
  return 10 ** Math.ceil(Math.log10(most));
}

/** 0 below the least level, else one for every level that is reached. */
function levelOf(value: number, levels: readonly number[]): number {
  let level = 0;
  for (let i = levels.length - 1; i >= 0 && value >= levels[i]!; i--) level++;
  return level;
}

function legend(levels: readonly number[], fills: readonly string[]): Markup {
  const rising = [...levels].reverse();
  return legendOf(
    rising.flatMap((from, i) => {
      const to = rising[i + 1];
      if (to === undefined) return [];
      return [{ fill: fills[i + 1]!, text: `${formatPercent(from)} to ${formatPercent(to)}` }];
    }),
  );
}

function population({ analysis }: ReportSource): Markup {
  const values = [...analysis.posterior.effective].map((n) => (n > 0 ? n : null));
  const measure = { value: values, lower: [], upper: [] };
  const limit = analysis.study.limits.thin;
  const ends = endsFor(measure, 'log', [limit]);
  const across = axisBands(analysis.trueAxis, false, ACROSS);
  const bars = measurePicture({
    name: 'Effective entries of every column',
    across,
    measure,
    title: 'effective entries',
    kind: 'log',
    ...ends,
    bars: true,
    limit: { value: limit, text: `limit ${limit}` },
  });
  return figure(bars, markup`<b>Population</b>: effective entries of every column, on a log scale.`);
}
