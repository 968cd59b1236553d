import { FLAG_IDS, type Flag, type FlagId } from '../../audit/flag';
import { isAbsent } from '../../audit/measure';
import { formatCount, formatEvents, formatNumber, formatPercent } from '../../audit/wording';
import { CAUTIONS } from '../cautions';
import { axisBands } from './bands';
import { ACROSS } from './cell-picture';
import { flagLimit, flagValue, FLAG_WORDS, SHAPES, worstOf } from './flag-words';
import { legendOf } from './frame';
import { markup, Markup, tableOf } from './markup';
import { columnsInWords } from './places';
import { sumOf, type MeasurePlan } from './measure-next';
import type { ReportSource } from './report-source';
import { figure, flagName, placesOf, plural } from './section';
import { VERDICT_FILLS, verdictStrip } from './verdict-strip';
import type { Verdict } from './verdicts';

/** The first page: which columns may be trusted, why, and what must still be measured. */
export function summaryPage(source: ReportSource): Markup {
  const { bundle } = source;
  return markup`<section class="summary"><header><p class="quiet">Response matrix: report of its calibration and audit</p>
<h1>${bundle.study.title}</h1></header>
<aside class="cautions"><p>${CAUTIONS.join(' ')}</p></aside>
<h2>Which columns may I trust?</h2>${trust(source)}
<h2>Why?</h2>${reasons(source)}
<h2>What must I still measure?</h2>${toMeasure(source)}</section>
`;
}

const ANSWERS: Record<Verdict, { mark: string; title: string; means: string }> = {
  sound: { mark: '', title: 'As they stand', means: 'no flag is raised' },
  care: {
    mark: SHAPES.undecided,
    title: 'With care',
    means: 'known within the intervals, but the instrument tells little here, or an answer is undecided',
  },
  unsound: {
    mark: SHAPES.flagged,
    title: 'Not as they stand',
    means: 'too little is known, or the truth may lie outside the intervals by more than they say',
  },
};

function trust(source: ReportSource): Markup {
  const { verdicts, analysis } = source;
  const { contents } = analysis.reference;
  const all = sumOf(contents);
  const rows = (['sound', 'care', 'unsound'] as const).map((verdict) => {
    const own = verdicts.filter((one) => one.verdict === verdict).map(({ column }) => column);
    const share = own.reduce((sum, j) => sum + contents[j]!, 0) / all;
    const { mark, title, means } = ANSWERS[verdict];
    const why = verdict === 'sound' && own.length > 0 ? `${means}; ${soundness(source, own)}` : means;
    const columns = own.length === 0 ? 'none' : columnsInWords(analysis.trueAxis, own);
    return [
      markup`<span class="shape">${mark}</span>`,
      markup`<b>${title}</b> <span class="quiet">${why}</span>`,
      columns,
      all > 0 ? formatPercent(share, 2) : '–',
    ];
  });
  const strip = verdictStrip(
    axisBands(analysis.trueAxis, false, ACROSS),
    verdicts,
    'Verdict on every column along the true axis',
  );
  const legend = legendOf([
    { fill: VERDICT_FILLS.sound, text: 'as it stands' },
    { fill: VERDICT_FILLS.care, text: `${SHAPES.undecided} with care` },
    { fill: VERDICT_FILLS.unsound, text: `${SHAPES.flagged} not as it stands` },
  ]);
  const table = tableOf(['', 'Use', 'Columns', 'Of the reference spectrum'], rows, { numeric: [3] });
  return markup`${table}${figure(strip, legend)}`;
}

/** Why the columns without a flag may be trusted, by the least of them. */
function soundness({ analysis, measures }: ReportSource, columns: readonly number[]): string {
  const effective = Math.min(...columns.map((j) => analysis.posterior.effective[j]!));
  const { priorShare, efficiency } = measures.columns;
  const largest = (values: readonly (number | null)[]): number => Math.max(...columns.map((j) => values[j] ?? 0));
  const parts = [`${formatNumber(effective)} or more effective entries`];
  if (priorShare && !isAbsent(priorShare))
    parts.push(`prior share ${formatPercent(largest(priorShare.value), 2)} or less`);
  if (efficiency && !isAbsent(efficiency)) {
    const halves = efficiency.value.map((_, j) => (efficiency.upper[j]! - efficiency.lower[j]!) / 2);
    parts.push(`efficiency known to ±${formatPercent(largest(halves), 2)} or better`);
  }
  return parts.join(', ');
}

/** One line a flag that is raised: where, and the worst of its values. */
function reasons(source: ReportSource): Markup {
  const rows = FLAG_IDS.flatMap((id) => {
    const flagged = placesOf(source, id, 'flagged');
    const undecided = placesOf(source, id, 'undecided');
    if (flagged.flags.length + undecided.flags.length === 0) return [];
    const worst = worstOf(flagged.flags.length > 0 ? flagged.flags : undecided.flags);
    const state = flagged.flags.length > 0 ? 'flagged' : 'undecided';
    return [[flagName(id, state), where(source, id, flagged, undecided), worst ? worstText(source, worst) : '–']];
  });
  const clear = source.flags.filter(({ state }) => state === 'clear').length;
  const rest = markup`<p class="quiet">${SHAPES.flagged} flagged, ${SHAPES.undecided} undecided at ${formatPercent(source.analysis.study.credibility)} posterior probability; ${formatCount(clear)} further answers are clear. Each with its evidence: <a href="#flags">Flags</a>.</p>`;
  if (rows.length === 0) return markup`<p>No flag is raised.</p>${rest}`;
  return markup`${tableOf(['Flag', 'Where', 'Worst, and the limit'], rows, { kind: 'plain reasons' })}${rest}`;
}

type Places = ReturnType<typeof placesOf>;

function where(source: ReportSource, id: FlagId, flagged: Places, undecided: Places): Markup {
  const part = (mark: string, { flags, columns, bins }: Places): Markup | null => {
    if (flags.length === 0) return null;
    const { trueAxis, recoAxis } = source.analysis;
    const whole = id === 'duplicate' ? 'the event list' : 'the whole matrix';
    const text =
      columns.length > 0
        ? columnsInWords(trueAxis, columns)
        : bins.length > 0
          ? `reconstructed ${columnsInWords(recoAxis, bins).replaceAll('columns', 'bins')}`
          : whole;
    return markup`<span class="where"><span class="shape">${mark}</span> ${text}</span> `;
  };
  return markup`${part(SHAPES.flagged, flagged)}${part(SHAPES.undecided, undecided)}`;
}

function worstText(source: ReportSource, flag: Flag): string {
  const { unit } = source.analysis.recoAxis;
  return `${FLAG_WORDS[flag.id].quantity} ${flagValue(flag, unit)}; limit ${flagLimit(flag, unit)}`;
}

/** Columns named on the first page; the rest stand in the plan. */
const MOST_COLUMNS = 10;

function toMeasure(source: ReportSource): Markup {
  const { plan, flags } = source;
  const actions = actionsBesides(flags);
  const besides =
    actions.length === 0
      ? null
      : markup`<p><b>No number of events mends</b> ${actions.map((id, i) => markup`${i > 0 ? '; ' : ''}<i>${FLAG_WORDS[id].title}</i> (${remedyOf(source, id)})`)}.</p>`;
  return markup`<p>${neededEvents(source)} ${settling(plan)} Column by column: <a href="#next">What to measure next</a>.</p>${besides}`;
}

function neededEvents({ plan, column }: ReportSource): Markup {
  const wanted = [...plan.needed.keys()]
    .filter((j) => plan.needed[j]! > 0)
    .sort((a, b) => plan.needed[b]! - plan.needed[a]!);
  if (wanted.length === 0) return markup`<b>No more calibration events are needed</b> for the limits of this study.`;
  const purposes = [
    ...(sumOf(plan.populate) > 0 ? ['populate the columns that are empty, thin or led by the prior'] : []),
    ...(sumOf(plan.influence) > 0
      ? ['keep the matrix from limiting any reconstructed bin under the reference spectrum']
      : []),
  ];
  const parts = wanted.slice(0, MOST_COLUMNS).map((j) => `${column(j)}: ${formatEvents(plan.needed[j]!)}`);
  const left = wanted.slice(MOST_COLUMNS);
  if (left.length > 0) {
    parts.push(
      `${left.length} more ${plural(left.length, 'column')}: ${formatEvents(sumOf(left.map((j) => plan.needed[j]!)))}`,
    );
  }
  return markup`<b>${formatEvents(sumOf(plan.needed))} more calibration events</b> (there are ${formatCount(sumOf(plan.events))}) ${purposes.join(', and ')}: ${parts.join('; ')}.`;
}

function settling({ settlements, needed, all }: MeasurePlan): string {
  if (settlements.length === 0) return '';
  const affordable = settlements.filter(({ isAffordable }) => isAffordable).length;
  const dear = settlements.length - affordable;
  const more = sumOf(all) - sumOf(needed);
  const settled =
    affordable === 0
      ? ''
      : `A further ${formatEvents(more)} are expected to settle ${affordable} undecided ${plural(affordable, 'answer')} besides.`;
  if (dear === 0) return settled;
  const which = affordable === 0 ? `${dear} undecided ${plural(dear, 'answer')}` : String(dear);
  return `${settled} ${which} would take more than the whole calibration, or cannot be settled: take ${plural(dear, 'it', 'them')} as lying at the limit.`;
}

/** Flags that are raised for good, whatever is measured. */
function actionsBesides(flags: readonly Flag[]): FlagId[] {
  const mended: FlagId[] = ['empty', 'thin', 'prior-led', 'matrix-limited', 'negative-weight'];
  return FLAG_IDS.filter(
    (id) => !mended.includes(id) && flags.some((flag) => flag.id === id && flag.state === 'flagged'),
  );
}

/** What to do, in a few words; the advice of each flag says more. */
const REMEDIES: Partial<Record<FlagId, string>> = {
  lossy: 'find the cause, or leave the columns out',
  'spill-below': 'start the reconstructed axis lower',
  'spill-above': 'end the reconstructed axis higher',
  'feed-in': 'widen the true axis',
  unstable: 'use wider bins',
  impure: 'use wider bins',
  'non-monotone': 'the response turns back: leave one of the columns out, or merge',
  'slope-bias': 'narrower bins, or a calibration nearer to the reference spectrum',
  'single-event': 'look at that event',
  duplicate: 'take the rows out that are there twice',
  'ill-conditioned': 'fewer true bins, or regularise the unfolding',
};

function remedyOf(source: ReportSource, id: FlagId): string {
  if (id !== 'run-drift') return REMEDIES[id] ?? 'see its advice';
  const runs = new Set(
    source.deep.drift.columns.flatMap((drift, j) => {
      const flag = source.deep.drift.flags.find(({ column }) => column === source.bundle.columns[j]);
      return drift && flag?.state === 'flagged' ? [drift.run] : [];
    }),
  );
  const named = [...runs].map((run) => `"${run}"`);
  return `look at ${plural(named.length, 'run')} ${named.slice(0, 4).join(', ')}: leave out what drifted, or build one matrix a period`;
}

/** A number with its share of a whole in percent. */
export function withShare(n: number, all: number): string {
  return all > 0 ? `${formatCount(n)} (${formatNumber((100 * n) / all, 2)} %)` : formatCount(n);
}
