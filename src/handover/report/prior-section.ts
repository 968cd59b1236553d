import { formatCount, formatNumber } from '../../audit/wording';
import { priorOf } from '../../posterior/prior';
import { FLAG_WORDS } from './flag-words';
import { markup, Markup, tableOf } from './markup';
import type { ReportSource } from './report-source';
import type { Section } from './section';
import { priorInWords } from './study-section';

/** The prior, and what the study would say under others. */
export const priorSection: Section = { id: 'prior', title: 'The prior, and what depends on it', body: prior };

function prior(source: ReportSource): Markup {
  const { analysis, sensitivity, bundle } = source;
  const rows = sensitivity.priors.map(({ name, change, changed }) => {
    const worst = change.reduce((best, x, j) => (x > change[best]! ? j : best), 0);
    const most = change[worst]!;
    return [
      name,
      most > 0 ? `${formatNumber(most, 2)} sd, at ${source.column(worst)}` : 'none',
      formatCount(change.filter((x) => x > 1).length),
      answersChanged(changed),
    ];
  });
  const head = ['Prior', 'Largest change of a mean', 'Columns changed by more than 1 sd', 'Answers that change'];
  return markup`<p>${priorInWords(analysis.study.prior)} ${strength(source)} The same tally under four priors, against the prior of this study; changes of a cell's mean in units of its own standard deviation.</p>
${tableOf(head, rows, { numeric: [2], kind: 'plain named' })}<p>${largest(source)}</p>
<p class="quiet">Compared are the answers that rest on tally and posterior alone, over ${formatCount(bundle.columns.length)} columns.</p>`;
}

/** Ids of answers named; the rest are counted. */
const MOST_IDS = 4;

function answersChanged(changed: ReportSource['sensitivity']['priors'][number]['changed']): string {
  if (changed.length === 0) return 'none';
  const count = new Map<string, number>();
  for (const { id } of changed) count.set(FLAG_WORDS[id].title, (count.get(FLAG_WORDS[id].title) ?? 0) + 1);
  const parts = [...count].slice(0, MOST_IDS).map(([title, n]) => (n > 1 ? `${title} (${n})` : title));
  if (count.size > MOST_IDS) parts.push(`and ${count.size - MOST_IDS} more`);
  return `${changed.length}: ${parts.join(', ')}`;
}

function largest({ sensitivity, bundle, column, outcome }: ReportSource): string {
  const { largest } = sensitivity;
  if (!largest) return 'No prior changes any mean.';
  const [j, k] = [bundle.columns.indexOf(largest.column), bundle.outcomes.indexOf(largest.outcome)];
  return `The largest change of all: under the ${largest.prior} prior the probability of ${outcome(k)} in the column ${column(j)} goes from ${formatNumber(largest.from)} to ${formatNumber(largest.to)}, ${formatNumber(largest.inSd, 2)} standard deviations.`;
}

function strength({ analysis }: ReportSource): string {
  const { study, tally, trueAxis, recoAxis } = analysis;
  if (!('neighbours' in study.prior)) return '';
  const { neighbours } = priorOf(study.prior, tally, trueAxis, recoAxis);
  if (!neighbours || neighbours.strength === null) return 'No column has neighbours: Jeffreys stands in.';
  const known = [...neighbours.strengths].filter((kappa) => kappa > 0);
  const [least, most] = [Math.min(...known), Math.max(...known)];
  return `The evidence of all columns is highest at a strength of ${formatNumber(neighbours.strength)} pseudo-counts (${formatNumber(least)} to ${formatNumber(most)} with the column itself left out).`;
}
