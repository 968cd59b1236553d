import { STUDY_SCHEMA, type StudyInput } from '../study/study';
import { InputError } from '../study/input-error';
import type { ColumnFacts, FileFacts } from './batch';

export type Role = 'true' | 'reconstructed' | 'weight' | 'run' | 'event';

/** A starting study for event files, and why each role was proposed. */
export interface ProposedStudy {
  study: StudyInput;
  reasons: Partial<Record<Role, string>>;
}

/** Words by which columns are commonly named (common practice), the surer ones first. */
const NAMES: Record<Role, RegExp[]> = {
  true: [/(^|_)(true|truth|tag|tagged|gen|generated|mc)(_|$)/i, /true|truth|tag|gen|incident|nominal|beam/i],
  reconstructed: [
    /(^|_)(rec|reco|reconstructed|meas|measured|cluster|det|obs|visible|vis)(_|$)/i,
    /rec|meas|clus|det|obs|vis|loss|class|assigned/i,
  ],
  weight: [/^(w|wgt|weight|weights)$/i, /weight|wgt/i],
  run: [/^run(_?(no|nr|id|number))?$/i, /(^|_)run(_|$)/i],
  event: [/^(event|evt)(_?(no|nr|id|number))?$/i, /^id$/i],
};

/** Events a column should have on average before the axis is cut finer. */
const EVENTS_PER_COLUMN = 250;
const MOST_PROPOSED_BINS = 40;
const FEWEST_PROPOSED_BINS = 5;

/**
 * A study that `build` takes as it is: roles by the names of the columns, else by their content, axes over the
 * observed range. `names` are the files as the study is to name them. Throws `InputError` where no two columns can
 * serve as true and reconstructed values.
 */
export function proposeStudy(facts: readonly FileFacts[], names: readonly string[]): ProposedStudy {
  const columns = joinColumns(facts);
  const rows = facts.reduce((sum, file) => sum + file.rows, 0);
  const { roles, reasons } = proposeRoles(columns, facts[0]!.path);
  const column = (role: 'true' | 'reconstructed'): ColumnFacts => columns.find(({ name }) => name === roles[role])!;
  const bins = Math.max(FEWEST_PROPOSED_BINS, Math.min(MOST_PROPOSED_BINS, Math.floor(rows / EVENTS_PER_COLUMN)));
  const study: StudyInput = {
    schema: STUDY_SCHEMA,
    title: 'New study',
    events: { files: [...names] },
    roles,
    lost: column('reconstructed').missing > 0 ? 'missing' : 'unrecorded',
    cuts: [],
    axes: { true: proposeAxis(column('true'), bins), reconstructed: proposeAxis(column('reconstructed'), bins) },
    prior: { pseudoCount: 0.5 },
    credibility: 0.95,
    ensemble: { replicas: 1000, seed: 1 },
  };
  return { study, reasons };
}

/** The columns that every file has, their facts joined. */
function joinColumns(facts: readonly FileFacts[]): ColumnFacts[] {
  const [first, ...others] = facts;
  return first!.columns.flatMap((column) => {
    const same = others.map((file) => file.columns.find(({ name }) => name === column.name));
    if (same.some((other) => !other)) return [];
    return [same.reduce<ColumnFacts>((a, b) => joinFacts(a, b!), column)];
  });
}

function joinFacts(a: ColumnFacts, b: ColumnFacts): ColumnFacts {
  const ends = (pick: (...values: number[]) => number, x: number | null, y: number | null): number | null =>
    x === null ? y : y === null ? x : pick(x, y);
  return {
    name: a.name,
    type: a.type === 'number' && b.type === 'number' ? 'number' : 'text',
    missing: a.missing + b.missing,
    malformed: a.malformed + b.malformed,
    nonFinite: a.nonFinite + b.nonFinite,
    least: ends(Math.min, a.least, b.least),
    greatest: ends(Math.max, a.greatest, b.greatest),
    labels: a.labels && b.labels && [...new Set([...a.labels, ...b.labels])].sort(),
  };
}

function proposeRoles(columns: ColumnFacts[], where: string) {
  const reasons: ProposedStudy['reasons'] = {};
  const taken = new Set<string>();
  const take = (role: Role, column: ColumnFacts | undefined, reason: string): string | undefined => {
    if (!column) return undefined;
    taken.add(column.name);
    reasons[role] = reason;
    return column.name;
  };
  const free = (): ColumnFacts[] => columns.filter(({ name }) => !taken.has(name));
  const byName = (role: Role, fits: (column: ColumnFacts) => boolean): ColumnFacts | undefined => {
    for (const words of NAMES[role]) {
      const found = free().find((column) => words.test(column.name) && fits(column));
      if (found) return found;
    }
    return undefined;
  };
  const named = 'its name';
  const weight = take('weight', byName('weight', isNumber), named);
  const run = take(
    'run',
    byName('run', () => true),
    named,
  );
  const event = take(
    'event',
    byName('event', () => true),
    named,
  );
  const truth =
    take('true', byName('true', isAxis), named) ?? take('true', free().find(isAxis), 'the first column left');
  const reco =
    take('reconstructed', byName('reconstructed', isAxis), named) ??
    take(
      'reconstructed',
      mostAlike(
        columns.find(({ name }) => name === truth),
        free(),
      ),
      'a range like that of the true value',
    ) ??
    take('reconstructed', free().find(isAxis), 'the first column left');
  if (truth === undefined || reco === undefined) {
    const known = columns.map(({ name }) => name).join(', ') || 'none';
    throw new InputError(
      where,
      `no two columns for true and reconstructed values (columns: ${known})`,
      'check the delimiter and the header',
    );
  }
  const roles: StudyInput['roles'] = { true: truth, reconstructed: reco };
  if (weight !== undefined) roles.weight = weight;
  if (run !== undefined) roles.run = run;
  if (event !== undefined) roles.event = event;
  return { roles, reasons };
}

function isNumber(column: ColumnFacts): boolean {
  return column.type === 'number' && column.least !== null;
}

/** The column of numbers whose range overlaps that of the true value the most. */
function mostAlike(truth: ColumnFacts | undefined, columns: ColumnFacts[]): ColumnFacts | undefined {
  if (!truth || !isNumber(truth)) return undefined;
  const alike = columns.filter(isNumber).map((column) => ({ column, share: overlap(truth, column) }));
  return alike.filter(({ share }) => share > 0).sort((a, b) => b.share - a.share)[0]?.column;
}

/** What two ranges share, over what they span together. */
function overlap(a: ColumnFacts, b: ColumnFacts): number {
  const shared = Math.min(a.greatest!, b.greatest!) - Math.max(a.least!, b.least!);
  return shared / (Math.max(a.greatest!, b.greatest!) - Math.min(a.least!, b.least!));
}

/** Most labels of a text column that is proposed as an axis of tags. */
const MOST_TAGS = 50;

function isAxis(column: ColumnFacts): boolean {
  return isNumber(column) || (column.labels !== null && column.labels.length > 0 && column.labels.length <= MOST_TAGS);
}

function proposeAxis(column: ColumnFacts, bins: number): StudyInput['axes']['true'] {
  if (!isNumber(column)) return { label: column.name, tags: column.labels! };
  const { from, to, count } = roundRange(column.least!, column.greatest!, bins);
  return { label: column.name, unit: unitIn(column.name), from, to, bins: count, spacing: 'linear' };
}

/** A width is taken as round enough when only the rounding of its computation stands between. */
const ROUNDING = 1e-9;

/** A range of round numbers that holds both ends, the upper one inside, in about `bins` steps of a round width. */
export function roundRange(least: number, greatest: number, bins: number): { from: number; to: number; count: number } {
  const span = greatest > least ? greatest - least : Math.max(1, Math.abs(least));
  const raw = span / bins;
  const decade = 10 ** Math.floor(Math.log10(raw));
  const step = [1, 2, 2.5, 5, 10].map((m) => m * decade).find((width) => width >= raw * (1 - ROUNDING))!;
  const first = Math.floor(least / step);
  let last = Math.floor(greatest / step) + 1;
  if (last * step <= greatest) last += 1;
  const tidy = (x: number): number => Number(x.toPrecision(12));
  return { from: tidy(first * step), to: tidy(last * step), count: last - first };
}

const UNITS = [
  'eV',
  'keV',
  'MeV',
  'GeV',
  'TeV',
  'ps',
  'ns',
  'us',
  'ms',
  'mm',
  'cm',
  'm',
  'deg',
  'rad',
  'mrad',
  'K',
  'Hz',
];

/** The unit that a column's name ends in (`e_tag_MeV`), else none. */
function unitIn(name: string): string {
  const ending = /[_ [(]([A-Za-z]+)[\])]?$/.exec(name)?.[1]?.toLowerCase();
  return UNITS.find((unit) => unit.toLowerCase() === ending) ?? '';
}
