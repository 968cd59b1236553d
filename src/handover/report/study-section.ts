import { formatCount, formatNumber, formatPercent } from '../../audit/wording';
import { binCount, type Axis } from '../../study/axis';
import type { Cut, Prior, Study } from '../../study/study';
import { markup, Markup, tableOf } from './markup';
import { edgeTexts } from './places';
import type { ReportSource } from './report-source';
import { plural, type Section } from './section';

/** The study in words: what was read, which rows count, what the numbers depend on. */
export const studySection: Section = { id: 'study', title: 'The study', body: studyInWords };

function studyInWords({ bundle, analysis }: ReportSource): Markup {
  const { study, manifest } = bundle;
  const { trueAxis, recoAxis } = analysis;
  return markup`<p>${source(study, manifest.inputs.length)} ${losses(study)} ${unmatched(study)} ${cuts(study.cuts)}</p>
<p>The matrix has ${formatCount(bundle.columns.length)} columns, one for each bin of the true value, and ${formatCount(bundle.outcomes.length)} outcomes: every event of a column ends in exactly one of them, so the probabilities of a column sum to one. ${priorInWords(study.prior)} Intervals are equal-tailed at ${formatPercent(study.credibility)}; a cell without events shows an upper limit. The ensemble holds ${formatCount(bundle.replicas)} replicas of the matrix (seed ${study.ensemble.seed}). Bins are half-open: a value at the lower edge is in, one at the upper edge is not, in the last bin too.</p>
${tableOf(['Axis', 'Quantity', 'From', 'To', 'Bins', 'Spacing'], [axisRow('true', trueAxis), axisRow('reconstructed', recoAxis)], { numeric: [2, 3, 4] })}${edgeList('True', trueAxis)}${edgeList('Reconstructed', recoAxis)}`;
}

function source({ roles, events }: Study, files: number): string {
  const named = [
    `the true value is column "${roles.true}"`,
    `the reconstructed value "${roles.reconstructed}"`,
    ...(roles.weight === undefined ? [] : [`the weight "${roles.weight}"`]),
    ...(roles.run === undefined ? [] : [`the run "${roles.run}"`]),
    ...(roles.event === undefined ? [] : [`the identity of an event "${roles.event}"`]),
  ];
  const weights = roles.weight === undefined ? ' Every event has weight one.' : '';
  return `Tagged events of ${files} ${plural(files, 'file')} (${events.files.join(', ')}): ${named.join(', ')}.${weights}`;
}

function losses({ lost }: Study): string {
  return lost === 'missing'
    ? 'A row without a reconstructed value is an event that was lost.'
    : 'Losses were not recorded: efficiency cannot be measured, and the columns describe reconstructed events alone.';
}

function unmatched(study: Study): string {
  if (study.unmatched === 'reject') return 'A row without a true value is rejected.';
  return 'A row without a true value is counted apart, as background, and is in no column.';
}

function cuts(list: readonly Cut[]): string {
  if (list.length === 0) return 'No cut is made.';
  const words = list.map(({ column, is, value }) => `"${column}" ${COMPARISONS[is]} ${valueText(value)}`);
  return `Only rows that meet ${words.join(' and ')} are kept.`;
}

const COMPARISONS: Record<Cut['is'], string> = {
  '<': '<',
  '<=': '≤',
  '>': '>',
  '>=': '≥',
  '=': '=',
  '!=': '≠',
  in: 'is one of',
};

function valueText(value: Cut['value']): string {
  if (Array.isArray(value)) return value.map((one) => valueText(one)).join(', ');
  return typeof value === 'number' ? formatNumber(value, 15) : `"${value}"`;
}

/** The prior as a sentence. */
export function priorInWords(prior: Prior): string {
  if ('pseudoTotal' in prior) {
    return `The prior of a column is a total of ${formatNumber(prior.pseudoTotal)} pseudo-counts, shared evenly by its outcomes${prior.pseudoTotal === 1 ? ' (Perks)' : ''}.`;
  }
  if ('pseudoCount' in prior) {
    const name = { 1: ' (flat)', 0.5: ' (Jeffreys)' }[prior.pseudoCount] ?? '';
    return `The prior of a column is ${formatNumber(prior.pseudoCount)} pseudo-counts for each outcome${name}.`;
  }
  return 'The prior of a column is made of its neighbours, shifted and at a strength found by their evidence; no column informs its own.';
}

function axisRow(name: string, axis: Axis): (string | number)[] {
  const quantity = axis.label || '–';
  if (axis.kind === 'tags') return [name, quantity, '–', '–', binCount(axis), 'tags'];
  const texts = edgeTexts(axis.edges);
  const unit = axis.unit ? ` ${axis.unit}` : '';
  const widths = axis.edges.subarray(1).map((edge, i) => edge - axis.edges[i]!);
  const isEven = axis.spacing === 'linear' && widths.every((w) => Math.abs(w / widths[0]! - 1) < EVEN);
  const spacing =
    axis.spacing === 'log' ? 'logarithmic' : isEven ? `even, ${formatNumber(widths[0]!)}${unit}` : 'by edges';
  return [name, quantity, `${texts[0]}${unit}`, `${texts.at(-1)}${unit}`, binCount(axis), spacing];
}

/** Widths that differ by less than this part are those of one step, rounded. */
const EVEN = 1e-9;

function edgeList(name: string, axis: Axis): Markup {
  if (axis.kind === 'tags') return markup`<p class="quiet">${name} tags: ${axis.tags.join(', ')}.</p>`;
  return markup`<p class="quiet">${name} edges${axis.unit ? `, ${axis.unit}` : ''}: ${edgeTexts(axis.edges).join(', ')}.</p>`;
}
