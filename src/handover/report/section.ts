import { isAbsent, type ListedMeasure, type Measure } from '../../audit/measure';
import type { FlagId } from '../../audit/flag';
import { FLAG_WORDS, SHAPES } from './flag-words';
import { markup, Markup } from './markup';
import type { ReportSource } from './report-source';

/** One section of the report: what it is called, the name that links to it have, and what it says. */
export interface Section {
  id: string;
  title: string;
  body: (source: ReportSource) => Markup;
}

/** A picture with its words below; the two stay on one page. */
export function figure(picture: Markup, caption: Markup): Markup {
  return markup`<figure>${picture}<figcaption>${caption}</figcaption></figure>
`;
}

/** What `draw` makes of a measure, or why the measure is absent. */
export function ifMeasured(measure: Measure | undefined, draw: (measure: ListedMeasure) => Markup): Markup {
  if (measure === undefined) return markup`<p class="quiet">Not part of this audit.</p>`;
  return isAbsent(measure) ? markup`<p class="quiet">Not measurable here: ${measure.reason}.</p>` : draw(measure);
}

/** A flag by its shape and title. */
export function flagName(id: FlagId, state: 'flagged' | 'undecided'): Markup {
  return markup`<span class="flag"><span class="shape">${SHAPES[state]}</span> ${FLAG_WORDS[id].title}</span>`;
}

/** Indices of the columns that a raised flag of one id concerns, in order; flags of bins and of the matrix have none. */
export function placesOf(source: ReportSource, id: FlagId, state: 'flagged' | 'undecided') {
  const flags = source.flags.filter((flag) => flag.id === id && flag.state === state);
  const { columns, outcomes } = source.bundle;
  const index = (names: readonly string[], name: string | null): number => names.indexOf(name ?? '');
  return {
    flags,
    columns: flags.map(({ column }) => index(columns, column)).filter((j) => j >= 0),
    bins: flags.map(({ bin }) => index(outcomes, bin)).filter((k) => k >= 0),
  };
}

export const plural = (n: number, one: string, many = `${one}s`): string => (n === 1 ? one : many);
