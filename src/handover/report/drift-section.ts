import { formatCount, formatInterval, formatNumber } from '../../audit/wording';
import { axisBands, evenBands } from './bands';
import { ACROSS, cellPicture } from './cell-picture';
import { HATCHES, legendOf } from './frame';
import { markup, Markup, tableOf } from './markup';
import type { ReportSource } from './report-source';
import { SHAPES } from './flag-words';
import { figure, ifMeasured, plural, type Section } from './section';

/** Whether the response was the same in every run. */
export const driftSection: Section = { id: 'drift', title: 'Run drift', body: drift };

/** Distances beyond chance, in units of the limit, at which the hatching grows denser. */
const STEPS = [0.25, 0.5, 1, 2, 4];
/** Room of a run in the picture, and the most that all may take. */
const RUN_HEIGHT = 22;
const MOST_HEIGHT = 260;

function drift(source: ReportSource): Markup {
  return ifMeasured(source.measures.columns.drift, () => markup`${picture(source)}${table(source)}`);
}

function picture({ analysis, deep }: ReportSource): Markup {
  const { runs, columns } = deep.drift;
  const limit = analysis.study.limits['run-drift-distance'];
  const across = axisBands(analysis.trueAxis, false, ACROSS);
  const up = evenBands(runs, 0, Math.min(MOST_HEIGHT, RUN_HEIGHT * runs.length), 'run', 'up');
  const level = (j: number, r: number): number => {
    const column = columns[j];
    const excess = (column?.distances[r] ?? 0) - (column?.expectedDistance ?? 0);
    return STEPS.filter((step) => excess >= step * limit).length;
  };
  const entries = STEPS.map((step, i) => {
    const next = STEPS[i + 1];
    const text =
      next === undefined
        ? `${formatNumber(step * limit)} or more`
        : `${formatNumber(step * limit)} to ${formatNumber(next * limit)}`;
    return { fill: HATCHES[i + 1]!, text };
  });
  return figure(
    cellPicture({ name: 'Distance of every run from the pool, column by column', across, up, level, fills: HATCHES }),
    markup`<b>Total-variation distance</b> of each run from all runs together, beyond what the furthest run of that column comes to by chance. White: not beyond. ${legendOf(entries)}`,
  );
}

function table({ analysis, deep, column }: ReportSource): Markup {
  const { columns, flags } = deep.drift;
  const states = new Map(flags.map((flag) => [flag.column, flag.state]));
  const rows = columns.flatMap((one, j) => {
    if (!one) return [];
    const isFlagged = states.get(one.column) === 'flagged';
    return [
      [
        markup`<span class="shape">${isFlagged ? SHAPES.flagged : ''}</span>`,
        column(j),
        `${formatNumber(one.gSquared)} / ${formatCount(one.freedom)}`,
        formatNumber(one.pValue, 2),
        formatNumber(one.adjusted, 2),
        `"${one.run}"`,
        formatInterval(one.distance, one.lower, one.upper),
        formatNumber(one.expectedDistance, 2),
        formatNumber(one.detectable, 2),
      ],
    ];
  });
  const untested = columns.length - rows.length;
  const { limits } = analysis.study;
  const head = ['', 'Column', 'G² / d.o.f.', 'p', 'p adjusted', 'Run', 'Distance', 'by chance', 'unseen below'];
  return markup`<p>Likelihood-ratio test of homogeneity over the runs, p-values by parametric bootstrap, adjusted for all columns (Benjamini-Hochberg). ${SHAPES.flagged}: adjusted p at most ${formatNumber(limits['run-drift'])} and the furthest run further than ${formatNumber(limits['run-drift-distance'])}. <i>By chance</i>: what the furthest run's distance comes to where nothing drifts. <i>Unseen below</i>: a shift of one run that may have escaped.${untested > 0 ? ` Not tested, with events of fewer than two runs: ${formatCount(untested)} ${plural(untested, 'column')}.` : ''}</p>
${tableOf(head, rows, { numeric: [2, 3, 4, 6, 7, 8], kind: 'dense' })}`;
}
