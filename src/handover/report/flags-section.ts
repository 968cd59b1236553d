import { FLAG_IDS, type Flag, type FlagId } from '../../audit/flag';
import { formatCount, formatPercent } from '../../audit/wording';
import { flagLimit, flagValue, FLAG_WORDS, SHAPES, type FlagKind } from './flag-words';
import { markup, Markup, tableOf } from './markup';
import type { ReportSource } from './report-source';
import { type Section } from './section';

/** Every flag that is raised, with evidence and advice, and how many answers are clear. */
export const flagsSection: Section = { id: 'flags', title: 'Flags', body: flags };

const KINDS: Record<FlagKind, string> = {
  statistics: 'too little known',
  validity: 'intervals may be too narrow',
  response: 'known, tells little',
  use: 'of bins or of the whole',
};

function flags(source: ReportSource): Markup {
  const present = FLAG_IDS.filter((id) => source.flags.some((flag) => flag.id === id));
  const raised = present.filter((id) => source.flags.some((flag) => flag.id === id && flag.state !== 'clear'));
  const asked = FLAG_IDS.filter((id) => !present.includes(id));
  return markup`<p>A limit has one of three answers by the posterior probability of lying beyond it: ${SHAPES.flagged} flagged, at least ${formatPercent(source.analysis.study.credibility)}; clear, at most one minus that; ${SHAPES.undecided} undecided between them. Numbers that are known exactly are compared with their limit. Run drift is a test and has no posterior probability.</p>
${counts(source, present)}${asked.length > 0 ? markup`<p class="quiet">Not asked in this study: ${asked.map((id) => FLAG_WORDS[id].title).join(', ')}.</p>` : null}
${raised.map((id) => group(source, id))}`;
}

function counts({ flags }: ReportSource, present: readonly FlagId[]): Markup {
  const rows = present.map((id) => {
    const own = flags.filter((flag) => flag.id === id);
    const number = (state: Flag['state']): string => {
      const n = own.filter((flag) => flag.state === state).length;
      return n === 0 ? '–' : formatCount(n);
    };
    const { title, kind } = FLAG_WORDS[id];
    return [title, KINDS[kind], number('flagged'), number('undecided'), number('clear')];
  });
  const all = (state: Flag['state']): string => formatCount(flags.filter((flag) => flag.state === state).length);
  rows.push(['in all', '', all('flagged'), all('undecided'), all('clear')]);
  return tableOf(['Flag', 'Says', `${SHAPES.flagged} flagged`, `${SHAPES.undecided} undecided`, 'clear'], rows, {
    numeric: [2, 3, 4],
    kind: 'plain summed',
  });
}

function group(source: ReportSource, id: FlagId): Markup {
  const own = source.flags.filter((flag) => flag.id === id && flag.state !== 'clear');
  const { unit } = source.analysis.recoAxis;
  const { title, quantity } = FLAG_WORDS[id];
  const hasChance = own.some(({ probability }) => probability !== null);
  const rows = own.map((flag) => [
    markup`<span class="shape">${SHAPES[flag.state]}</span>`,
    placeInWords(source, flag),
    flagValue(flag, unit),
    ...(hasChance ? [chanceInWords(flag.probability)] : []),
    markup`${sentence(flag.evidence)} <i>${sentence(flag.advice)}</i>`,
  ]);
  const value = `${quantity} (limit ${flagLimit(own[0]!, unit)})`;
  const head = ['', 'Where', value, ...(hasChance ? ['P beyond'] : []), 'Evidence, and what to do'];
  return markup`<h3>${capital(title)}</h3>${tableOf(head, rows, { kind: 'dense flags' })}`;
}

/** A probability this near to certainty is not known better: it comes from some hundred replicas. */
const NEARLY_SURE = 0.995;

function chanceInWords(probability: number | null): string {
  if (probability === null) return '–';
  if (probability >= NEARLY_SURE) return '> 99 %';
  return probability <= 1 - NEARLY_SURE ? '< 1 %' : formatPercent(probability, 2);
}

function sentence(text: string): string {
  return text === '' ? '' : `${capital(text)}.`;
}

function capital(text: string): string {
  return text.charAt(0).toUpperCase() + text.slice(1);
}

/** The place of a flag: a column, a reconstructed bin, the event list, or the whole matrix. */
export function placeInWords({ bundle, column, outcome }: ReportSource, flag: Flag): string {
  if (flag.column !== null) return column(bundle.columns.indexOf(flag.column));
  if (flag.bin !== null) return `bin ${outcome(bundle.outcomes.indexOf(flag.bin))}`;
  return flag.id === 'duplicate' ? 'event list' : 'whole matrix';
}
