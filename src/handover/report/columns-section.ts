import type { ColumnMeasure } from '../../audit/findings';
import type { ListedMeasure } from '../../audit/measure';
import { formatCount, formatInterval, formatNumber, formatPercent, formatShare } from '../../audit/wording';
import { axisBands } from './bands';
import { ACROSS } from './cell-picture';
import { markup, Markup, tableOf } from './markup';
import { measurePicture } from './measure-picture';
import { VERDICT_MARKS } from './verdict-strip';
import type { ReportSource } from './report-source';
import { figure, ifMeasured, type Section } from './section';

/** Efficiency and acceptance with their bands, and every measure of every column. */
export const columnsSection: Section = {
  id: 'columns',
  title: 'Efficiency, and the columns one by one',
  body: columns,
};

function columns(source: ReportSource): Markup {
  const { measures } = source;
  const { limits, credibility } = source.analysis.study;
  const level = formatPercent(credibility);
  return markup`${ifMeasured(measures.columns.efficiency, (measure) =>
    figure(
      sharePicture(source, measure, 'efficiency', { value: limits.lossy, text: `limit ${limits.lossy}` }),
      markup`<b>Efficiency</b>: probability that an event of the column is reconstructed at all; line: posterior mean, grey: ${level} interval.`,
    ),
  )}${ifMeasured(measures.columns.acceptance, (measure) =>
    figure(
      sharePicture(source, measure, 'acceptance'),
      markup`<b>Acceptance</b>: probability that it is reconstructed inside the window.`,
    ),
  )}${tables(source)}`;
}

function sharePicture(
  { analysis }: ReportSource,
  measure: ListedMeasure,
  title: string,
  limit?: { value: number; text: string },
): Markup {
  const across = axisBands(analysis.trueAxis, false, ACROSS);
  return measurePicture({
    name: `${title} of every column`,
    across,
    measure,
    title,
    kind: 'linear',
    from: 0,
    to: 1,
    limit,
  });
}

/** Columns listed in full; of a finer matrix only those with a raised flag, the others stand in `columns.csv`. */
export const MOST_LISTED = 150;

type Show = 'share' | 'number' | 'reconstructed';
const FIRST: [ColumnMeasure, string, Show][] = [
  ['efficiency', 'Efficiency', 'share'],
  ['acceptance', 'Acceptance', 'share'],
  ['spillBelow', 'Spill below', 'share'],
  ['spillAbove', 'Spill above', 'share'],
];
const SECOND: [ColumnMeasure, string, Show][] = [
  ['bias', 'Bias', 'reconstructed'],
  ['resolution', 'Resolution', 'reconstructed'],
  ['stability', 'Stability', 'share'],
  ['purity', 'Purity', 'share'],
  ['slopeBias', 'Slope bias over sd', 'number'],
  ['drift', 'Run drift', 'number'],
];

function tables(source: ReportSource): Markup {
  const { bundle, analysis, verdicts, measures, plan } = source;
  const all = bundle.columns.length <= MOST_LISTED;
  const listed = verdicts.filter(({ verdict }) => all || verdict !== 'sound').map(({ column }) => column);
  const { effective } = analysis.posterior;
  const counts = (j: number): string[] => [
    formatCount(plan.events[j]!),
    formatNumber(effective[j]!, 4),
    withoutSign(formatPercent(priorShare(source, j))),
  ];
  const note = all
    ? null
    : markup`<p class="quiet">Of ${formatCount(bundle.columns.length)} columns the ${formatCount(listed.length)} with a raised flag; the others stand in columns.csv of the bundle.</p>`;
  const absent = [...FIRST, ...SECOND].flatMap(([id, title]) => {
    const measure = measures.columns[id];
    return measure?.value === null ? [`${title.toLowerCase()}: ${measure.reason}`] : [];
  });
  return markup`${note}${measureTable(source, listed, ['Events', 'Effective entries', 'Prior share, %'], counts, FIRST)}
${measureTable(source, listed, [], () => [], SECOND)}
<p class="quiet">Values with their ${formatPercent(analysis.study.credibility)} intervals${analysis.recoAxis.unit ? `; bias and resolution in ${analysis.recoAxis.unit}` : ''}. Resolution: half-width of the central 68 % of reconstructed minus true value. Slope bias and run drift: <a href="#flags">Flags</a>.${absent.length > 0 ? ` Not measurable here: ${absent.join('; ')}.` : ''}</p>`;
}

function priorShare({ measures }: ReportSource, j: number): number {
  return (measures.columns.priorShare as ListedMeasure).value[j]!;
}

function measureTable(
  source: ReportSource,
  listed: readonly number[],
  before: readonly string[],
  counts: (j: number) => string[],
  wanted: readonly [ColumnMeasure, string, Show][],
): Markup | null {
  const known = wanted.flatMap(([id, title, show]) => {
    const measure = source.measures.columns[id];
    return measure && measure.value !== null ? [{ title, show, measure }] : [];
  });
  if (known.length + before.length === 0) return null;
  const rows = listed.map((j) => [
    markup`<span class="shape">${VERDICT_MARKS[source.verdicts[j]!.verdict]}</span>`,
    source.column(j),
    ...counts(j),
    ...known.map(({ measure, show }) => (source.plan.events[j] === 0 ? 'no event' : reading(measure, j, show))),
  ]);
  const head = ['', 'Column', ...before, ...known.map(({ title, show }) => (show === 'share' ? `${title}, %` : title))];
  return tableOf(head, rows, { numeric: head.map((_, i) => i).slice(2), kind: 'dense' });
}

/** The head of the column bears the sign. */
function withoutSign(text: string): string {
  return text.replaceAll(' %', '');
}

function reading({ value, lower, upper }: ListedMeasure, j: number, show: Show): string {
  const [v, lo, hi] = [value[j], lower[j], upper[j]];
  if (v === null || v === undefined) return '–';
  const known = lo !== null && lo !== undefined && hi !== null && hi !== undefined;
  if (show === 'share') return withoutSign(known ? formatShare(v, lo, hi) : formatPercent(v));
  return known ? formatInterval(v, lo, hi) : formatNumber(v);
}
