/**
 * The bridge between the window and what it can ask for: one table, the same over Electron's channel and over the
 * loopback. `BRIDGE` names every call with the schema of its argument (checked on the main side) and the type of its
 * result. `session.ts` implements it. The page imports types from here and `connect` from `page-bridge.ts`, no more.
 *
 * How to use it from the page:
 * - `const bridge = await connect()`; `const answer = await bridge.call('tally', { study, folder })`.
 * - Every call answers `{ ok: true, value }` or `{ ok: false, code, where, what, remedy }`; it never throws for a
 *   fault of the user or of the engine. Typed arrays arrive as typed arrays.
 * - A long call takes a `job`, a name that the page makes up (`crypto.randomUUID()`). `bridge.listen(notice => ...)`
 *   hears `progress` of that job; `bridge.call('cancel', { job })` ends it, and its call answers `code: 'cancelled'`.
 * - A call that works on a study takes the whole study and its `folder` (absolute; what its paths are relative to).
 *   Answers are kept by the parts of the study they depend on: asking again after a change of title costs nothing.
 *   A newer call of `tally`, `posterior` or `audit` overtakes an older one that still waits: the older answers
 *   `code: 'overtaken'`, so a drag may send as many as it likes.
 * - Files: a page reads and writes only what the user chose. `chooseEvents` (or `dialog` on the desktop, or opening a
 *   study) is the act of choosing for reading, `choosePlace` for writing; other calls refuse a path that was not
 *   chosen (`code: 'refused'`). Hidden files and folders cannot be chosen in the frame.
 */
import { z } from '../src/study/zod';
import type { BinMeasure, ColumnMeasure } from '../src/audit/findings';
import type { Flag } from '../src/audit/flag';
import type { FileFacts } from '../src/events/batch';
import type { Study, StudyInput } from '../src/study/study';
import type { Ledger } from '../src/tally/ledger';

/** Why a call was not done. `overtaken` and `cancelled` need no words on the screen. */
export type RefusalCode =
  | 'input' // bad input: show where, what, remedy in the place it concerns
  | 'refused' // the bridge does not allow it: a path nobody chose, an argument of the wrong shape
  | 'cancelled'
  | 'overtaken'
  | 'not-read' // the events of this study are not read yet: call `readEvents` first
  | 'unavailable' // this transport cannot do it (a native dialog over the loopback)
  | 'fault'; // a defect of the program

export interface Refusal {
  ok: false;
  code: RefusalCode;
  where: string;
  what: string;
  remedy: string;
}
export type Answer<Value> = { ok: true; value: Value } | Refusal;

// ---------------------------------------------------------------- what the main side tells unasked

/** How far a job is. `done` and `total` in `unit`; `rate` in units per second; `null` where not known yet. */
export interface Progress {
  kind: 'progress';
  job: string;
  /** What is being done, as a phrase: "reading", "drawing replicas", "hashing". */
  phase: string;
  done: number;
  total: number | null;
  unit: 'bytes' | 'rows' | 'replicas' | 'steps';
  rate: number | null;
  secondsLeft: number | null;
  /** Rows passed so far, while events are read. */
  rows: number | null;
}

/** A menu or shortcut of the desktop, to be done by the page as if its own key had been pressed. */
export interface MenuCommand {
  kind: 'command';
  command:
    | 'new'
    | 'open'
    | 'open-events'
    | 'save'
    | 'save-as'
    | 'undo'
    | 'redo'
    | 'shortcuts'
    | 'about'
    | 'stage-1'
    | 'stage-2'
    | 'stage-3'
    | 'stage-4'
    | 'stage-5';
}

/** A study to open, from a second start of the program or from the system's file manager. */
export interface OpenRequest {
  kind: 'open';
  path: string;
}

export type Notice = Progress | MenuCommand | OpenRequest;

// ---------------------------------------------------------------- results

export interface StartFacts {
  version: string;
  platform: 'linux' | 'win32' | 'darwin';
  transport: 'desktop' | 'loopback';
  home: string;
  /** The folder that a new study's paths are relative to until it is saved. */
  folder: string;
  separator: '/' | '\\';
  cores: number;
  /** Most bytes of event columns kept in memory; beyond it files are read again. */
  keepBudget: number;
  recent: RecentStudy[];
  /** Left by a window that ended without saving or dropping it. */
  draft: Draft | null;
  /** Path of the demonstration study, `null` where it is not installed. */
  demonstration: string | null;
  /** Study named on the command line. */
  open: string | null;
}

export interface RecentStudy {
  path: string;
  title: string;
  /** Milliseconds since 1970. */
  opened: number;
  /** False where the file is gone. */
  there: boolean;
}

export interface Draft {
  /** The study's own file, `null` where it was never saved. */
  path: string | null;
  folder: string;
  study: StudyInput;
  saved: number;
}

export interface FolderListing {
  path: string;
  /** `null` at the top. */
  parent: string | null;
  /** Well-known starting points: home, the study's folder, the disks. */
  places: { label: string; path: string }[];
  /** Folders first, then files, each by name. Hidden ones are left out. */
  entries: FolderEntry[];
}

export interface FolderEntry {
  name: string;
  path: string;
  kind: 'folder' | 'bundle' | 'file';
  /** `null` for folders. */
  bytes: number | null;
  modified: number;
  /** What the file seems to be by its name. */
  looksLike: 'events' | 'study' | 'other';
}

export interface ChosenFiles {
  files: ChosenFile[];
  /** Patterns that name nothing, or nothing that can be read. */
  problems: Refusal[];
}
export interface ChosenFile {
  path: string;
  /** As a study in `folder` would name it. */
  name: string;
  bytes: number;
  modified: number;
}

export interface ChosenPlace {
  path: string;
  /** Something stands there already: the writing call then needs `replace: true`. */
  exists: boolean;
}

export interface OpenedStudy {
  path: string;
  folder: string;
  study: Study;
  /** The text as written by the user; unknown to the resolved study are only comments and spacing. */
  text: string;
  /** Files that the study names and that are not there, or patterns that match nothing. */
  problems: Refusal[];
  files: ChosenFile[];
}

export interface SavedStudy {
  path: string;
  folder: string;
  /** The study as saved: its paths are rebased where the folder has changed. */
  study: StudyInput;
}

export interface Histogram {
  /** `bins + 1` edges. */
  edges: Float64Array;
  /** `bins` counts (or weights) of `[lo, hi)`, the last bin closed. */
  counts: Float64Array;
  below: number;
  above: number;
  missing: number;
}

export interface FileInspection {
  facts: FileFacts;
  sha256: string;
  /** One a column of `facts.columns`, in that order. */
  sketches: ColumnSketch[];
  /** The first rows, as `readRows` gives them. */
  first: RowPage;
  seconds: number;
}
export interface ColumnSketch {
  name: string;
  /** Of the finite values; `null` for text and for columns without one. */
  histogram: Histogram | null;
  /** For text: the most frequent labels with their rows, at most 24; `null` for numbers. */
  labels: { label: string; rows: number }[] | null;
}

/** Rows of a file. The first `available` rows of a file can be asked for; the table says so where there are more. */
export interface RowPage {
  columns: string[];
  from: number;
  /** Physical line (or row number) of each row. */
  places: Float64Array;
  /** One list a row, one cell a column; `null` is missing. */
  rows: (number | string | null)[][];
  available: number;
  total: number;
}

export interface ProposedStudy {
  study: StudyInput;
  /** Why each role was proposed, in words; a role that was not found is absent. */
  reasons: Partial<Record<'true' | 'reconstructed' | 'weight' | 'run' | 'event', string>>;
}

export interface EventsRead {
  ledger: Ledger;
  /** One a cut of the study, in its order: rows that pass this cut, of those that came to it. */
  cuts: { passed: number; came: number }[];
  /** Labels of the runs, sorted; `null` where no run is read. */
  runs: string[] | null;
  observed: { true: Range | null; reconstructed: Range | null };
  /** Labels seen, where an axis is one of tags. */
  tags: { true: string[] | null; reconstructed: string[] | null };
  files: { name: string; bytes: number; rows: number; sha256: string | null }[];
  /** True where the columns stay in memory: a moved edge then needs no reading. */
  kept: boolean;
  keptBytes: number;
  rows: number;
  seconds: number;
}
export interface Range {
  least: number;
  greatest: number;
}

/** Value of a measure with its interval, one entry a place. NaN where a place has none. */
export interface Estimates {
  value: Float64Array;
  lower: Float64Array;
  upper: Float64Array;
}

/** Counts, and what moves at once while an edge is dragged. Arrays of cells are `[columns, outcomes]`, C order. */
export interface TallyView {
  columnNames: string[];
  outcomeNames: string[];
  weighted: boolean;
  events: Float64Array;
  weights: Float64Array | null;
  squares: Float64Array | null;
  /** `[runs, columns, outcomes]` events. */
  runs: { labels: string[]; events: Float64Array } | null;
  ledger: Ledger;
  /** `[columns]` events and effective entries. */
  population: Float64Array;
  effective: Float64Array;
  /** `null` with the reason where the study does not record losses, or the axes differ. */
  efficiency: Estimates | null;
  acceptance: Estimates | null;
  stability: Estimates | null;
  absent: { efficiency?: string; acceptance?: string; stability?: string };
  duplicates: { identities: number; rows: number; examples: string[][] } | null;
  /** True where the files had to be read again for this answer. */
  readAgain: boolean;
  seconds: number;
}

/** Posterior summary of every cell, `[columns, outcomes]`. */
export interface PosteriorView {
  columns: number;
  outcomes: number;
  mean: Float64Array;
  sd: Float64Array;
  /** Equal-tailed at the study's credibility; a cell without events has `lower = 0` and the one-sided limit. */
  lower: Float64Array;
  upper: Float64Array;
  /** Pseudo-counts of the prior. */
  prior: Float64Array;
  /** Mean under the prior alone, zero in a column whose prior is zero. */
  priorMean: Float64Array;
  /** `[columns]`. */
  effective: Float64Array;
  priorShare: Float64Array;
  /** `exact` Dirichlet marginals, `matched` Betas in weighted columns: one a column. */
  methods: ('exact' | 'matched' | 'none')[];
  /** Strength of the neighbour prior, with the evidence curve it was chosen on; `null` for other priors. */
  kappa: { value: number; grid: Float64Array; logEvidence: Float64Array } | null;
  seconds: number;
}

/** A measure of the audit over its places, or why it has no meaning in this study. */
export type MeasureView =
  | {
      value: Float64Array;
      lower: Float64Array | null;
      upper: Float64Array | null;
      reason: null;
      /** Places without a value (NaN in the lists), each with the reason. */
      absent?: { place: string; reason: string }[];
    }
  | { value: null; lower: null; upper: null; reason: string };

export type { BinMeasure, ColumnMeasure };

/** As `audit.json` and `flags.json`. */
export interface AuditView {
  flags: Flag[];
  columnNames: string[];
  binNames: string[];
  columns: Record<ColumnMeasure, MeasureView>;
  bins: Record<BinMeasure, MeasureView>;
  matrix: { singularValues: MeasureView; resolvable: MeasureView };
  /** Expected events of the reference spectrum in each column; `null` where there is none. */
  reference: Float64Array | null;
  /** One line on the reference spectrum, to stand beside every number that rests on it. */
  referenceWords?: string;
  /** The level that a singular value must exceed to be resolvable; `null` where it has no meaning. */
  noise?: number | null;
  /** What lies behind `drift`; `null` where no runs are read. */
  drift?: DriftView | null;
  seconds: number;
}

/** Runs against their pool, column by column; NaN where a column has fewer than two runs with events. */
export interface DriftView {
  runs: string[];
  /** `[columns, runs]` total-variation distance of each run from the pool; NaN for a run without events. */
  distances: Float64Array;
  /** `[columns]` p-value of homogeneity, as it is and after Benjamini-Hochberg. */
  pValue: Float64Array;
  adjusted: Float64Array;
  /** `[columns]` a shift of one run below this can pass unseen. */
  detectable: Float64Array;
}

export interface CellView {
  column: number;
  outcome: number;
  events: number;
  /** Sum of weights; `null` where unweighted. */
  weight: number | null;
  prior: number;
  mean: number;
  sd: number;
  equalTailed: [number, number];
  shortest: [number, number];
  /** Parameters of the marginal Beta and whether it is exact or matched in mean and variance. */
  a: number;
  b: number;
  method: 'exact' | 'matched';
  /** The density on a grid that covers all but 1e-4 of the probability at each side. */
  x: Float64Array;
  density: Float64Array;
  priorDensity: Float64Array;
}

export interface ColumnView {
  column: number;
  /** Band that holds the whole column at the study's credibility, from replicas; `[outcomes]` each. */
  band: { lower: Float64Array; upper: Float64Array; replicas: number };
  /** Events of the lower and of the upper half, `[outcomes]` each; `null` where the column has no midpoint. */
  halves: { lower: Float64Array; upper: Float64Array } | null;
  /** Events of each run in this column, `[runs, outcomes]`. */
  runs: { labels: string[]; events: Float64Array } | null;
}

export interface Replicas {
  /** Indices into the ensemble, counted from 0. */
  indices: number[];
  /** `[replicas, columns, outcomes]`, the very numbers that the bundle will hold. */
  values: Float64Array;
}

export interface AxisSuggestion {
  edges: number[];
  /** What was done, in one sentence with numbers. */
  note: string;
}

export interface RejectedRows {
  total: number;
  from: number;
  rows: { file: string; place: number; column: string | null; value: string | null; reason: string }[];
  /** Where places are physical lines or row numbers. */
  reasons: { reason: string; rows: number }[];
}

export interface BundleWritten {
  path: string;
  bytes: number;
  files: { name: string; bytes: number; sha256: string }[];
  ledger: Ledger;
  flags: { flagged: number; undecided: number };
  replicas: number;
  fingerprint: string;
  seconds: number;
}

export interface Verification {
  holds: boolean;
  checks: { what: string; holds: boolean; detail: string }[];
  seconds: number;
}

/** Is the calibration statistics enough (statistics.md 6). */
export interface InfluenceView {
  /** `[columns]` expected generated events of the reference spectrum. */
  reference: Float64Array;
  columnNames: string[];
  binNames: string[];
  /** `[bins]` folded content, variance from the matrix, Poisson variance. */
  folded: Float64Array;
  matrixVariance: Float64Array;
  dataVariance: Float64Array;
  /** `[bins, columns]` each column's share of the matrix variance of a bin; rows sum to 1. */
  shares: Float64Array;
  /** `[columns]` share of the summed variance, and the columns from the greatest down. */
  columnShare: Float64Array;
  ranking: number[];
  seconds: number;
}

export interface PlanView {
  columnNames: string[];
  /** `[columns]` events to add to each column. */
  add: Float64Array;
  total: number;
  /** Whether the target can be met by more events, and what is met if so, in words. */
  reachable: boolean;
  note: string;
  /** `[bins]` ratio of matrix to data variance now and after; `null` where the target is no variance. */
  before: Float64Array | null;
  after: Float64Array | null;
  seconds: number;
}

export interface PriorSensitivityView {
  columnNames: string[];
  priors: {
    name: string;
    /** `[columns, outcomes]`. */
    mean: Float64Array;
    sd: Float64Array;
    flags: { flagged: number; undecided: number };
    /** `[columns]` largest change of a mean in units of the study's own sd of that cell. */
    change: Float64Array;
    /** Flags whose answer differs from the study's own. */
    changed: { id: Flag['id']; column: string | null; bin: string | null; from: Flag['state']; to: Flag['state'] }[];
  }[];
  /** `null` where no prior changes any mean. */
  largest: { prior: string; column: number; outcome: number; inSd: number } | null;
  seconds: number;
}

/**
 * How well intervals would cover if the matrix were used: over many invented campaigns of the reference spectrum.
 * (Changed when the engine landed: coverage and widths over all campaigns, not the spectrum of one of them.)
 */
export interface RehearsalView {
  /** Columns that have reference content; arrays are over these. */
  columnNames: string[];
  reference: Float64Array;
  repetitions: number;
  /** How the true spectrum was inferred: with the matrix at its mean, and free under its posterior. */
  fixed: RehearsalSide;
  free: RehearsalSide;
  /** Sd of each column's probabilities after the untagged data over before. */
  narrowing: Float64Array;
  /** Largest split-chain R-hat and fewest effective draws of all inferences; share that ended before they had mixed. */
  rHat: number;
  effectiveDraws: number;
  unmixed: number;
  /** Weighted columns stood for themselves by their matched Dirichlet. */
  matched: boolean;
  note: string;
  seconds: number;
}
export interface RehearsalSide {
  /** Share of campaigns whose interval held the truth, with its Clopper-Pearson interval at 95 %. */
  coverage68: Estimates;
  coverage95: Estimates;
  /** Mean full width of the intervals over the reference content. */
  width68: Float64Array;
  width95: Float64Array;
  /** Over all columns: mean coverage with its standard error over the campaigns. */
  overall68: { value: number; error: number };
  overall95: { value: number; error: number };
}

export interface ComparisonView {
  columnNames: string[];
  outcomeNames: string[];
  names: [string, string];
  /** `[columns, outcomes]` second minus first, with interval ends. */
  difference: Float64Array;
  lower: Float64Array;
  upper: Float64Array;
  /** `[columns]`. */
  distance: Float64Array;
  pValue: Float64Array;
  /** `[columns]` p-value after Benjamini-Hochberg; NaN, as above, where a column cannot be compared. */
  adjusted?: Float64Array;
  /** Columns that differ after Benjamini-Hochberg at 0.05. */
  differing: number[];
  /** `[bins]` folded reference spectrum with each matrix. */
  folded: { binNames: string[]; first: Float64Array; second: Float64Array; sd: Float64Array } | null;
  seconds: number;
}

export interface ReplicasNeeded {
  replicas: number;
  note: string;
  seconds: number;
}

export interface WrittenFiles {
  files: { path: string; bytes: number; sha256: string }[];
  seconds: number;
}

// ---------------------------------------------------------------- arguments

/** Most rows of a page, replicas of a call, and rows of a file that can be looked at. */
export const MOST_PAGE_ROWS = 1000;
export const MOST_REPLICAS_A_CALL = 64;
/** Longest path that any of the three systems takes. */
const LONGEST_PATH = 4096;
/** A figure or a table that is saved from the page. */
const MOST_SAVED_BYTES = 256 * 2 ** 20;
const MOST_PATTERNS = 10_000;
const MOST_HISTOGRAM_BINS = 10_000;

const path = z.string().min(1).max(LONGEST_PATH);
const job = z.string().min(1).max(80);
const count = z.int().min(0).max(Number.MAX_SAFE_INTEGER);
/** Only its being an object is checked here: `parseStudy` checks the rest and names the JSON path of a fault. */
const study = z.custom<StudyInput>(
  (value) => typeof value === 'object' && value !== null && !Array.isArray(value),
  'needs a study document',
);
const nothing = z.strictObject({});
const atStudy = z.strictObject({ study, folder: path });
const jobAtStudy = atStudy.extend({ job });
const whichAxis = z.enum(['true', 'reconstructed']);

const suggestion = z.union([
  z.strictObject({ equalPopulation: z.strictObject({ bins: z.int().min(1).max(2000) }) }),
  z.strictObject({ followResolution: z.strictObject({ factor: z.number().positive().max(1000) }) }),
  z.strictObject({ mergeThin: z.strictObject({ effective: z.number().positive().max(1e12) }) }),
]);

const target = z.union([
  /** Matrix variance at most this many times the data variance in every bin. */
  z.strictObject({ matrixShare: z.number().positive().max(1000) }),
  /** Every undecided flag expected to be settled. */
  z.strictObject({ settleFlags: z.literal(true) }),
  /** Relative standard deviation of the efficiency of every column. */
  z.strictObject({ efficiencySd: z.number().positive().lt(1) }),
  /** What N more events would bring, spread as measured or where they pay most. */
  z.strictObject({ events: z.number().positive().max(1e15), spread: z.enum(['as measured', 'optimal']) }),
]);

export const PLACE_KINDS = ['study', 'bundle', 'figure', 'text', 'report', 'converted'] as const;
export type PlaceKind = (typeof PLACE_KINDS)[number];

interface Call<Schema extends z.ZodType, Result> {
  argument: Schema;
  /** Carries the result's type; never there at run time. */
  result?: Result;
}

function gives<Result>() {
  return <Schema extends z.ZodType>(argument: Schema): Call<Schema, Result> => ({ argument });
}

/** Every call of the bridge. */
export const BRIDGE = {
  start: gives<StartFacts>()(nothing),
  /** Stops a job; answers false where no such job runs. */
  cancel: gives<boolean>()(z.strictObject({ job })),

  // ---- files and places
  listFolder: gives<FolderListing>()(z.strictObject({ path: path.optional() })),
  /** Native dialog, desktop only (`unavailable` elsewhere); what it answers is chosen. `null`: closed by the user. */
  dialog: gives<{ paths: string[] } | null>()(
    z.strictObject({
      for: z.enum(['events', 'study', 'bundle', 'save']),
      place: z.enum(PLACE_KINDS).optional(),
      suggested: path.optional(),
    }),
  ),
  /** Paths, folders (all event files in it) or globs, absolute or relative to `folder`, chosen for reading. */
  chooseEvents: gives<ChosenFiles>()(
    z.strictObject({ patterns: z.array(path).min(1).max(MOST_PATTERNS), folder: path }),
  ),
  /** A file or folder (bundle) to be written, chosen. The kind fixes the endings it may have. */
  choosePlace: gives<ChosenPlace>()(z.strictObject({ path, kind: z.enum(PLACE_KINDS) })),
  /** A bundle to be verified, compared, converted or reported on, chosen for reading. */
  chooseBundle: gives<{ path: string }>()(z.strictObject({ path })),
  /** Opens the system's file manager there; desktop only. */
  reveal: gives<boolean>()(z.strictObject({ path })),

  // ---- the study document
  openStudy: gives<OpenedStudy>()(z.strictObject({ path })),
  /** `path` must have been chosen, or be the file the study was opened from. */
  saveStudy: gives<SavedStudy>()(z.strictObject({ study, folder: path, path, replace: z.boolean() })),
  keepDraft: gives<{ saved: number }>()(z.strictObject({ study, folder: path, path: path.nullable() })),
  dropDraft: gives<boolean>()(nothing),
  recentStudies: gives<RecentStudy[]>()(nothing),
  forgetStudy: gives<RecentStudy[]>()(z.strictObject({ path })),
  /** Tells the desktop's frame what to show in its title, and whether there are edits. */
  setTitle: gives<boolean>()(z.strictObject({ title: z.string().max(400), edited: z.boolean() })),

  // ---- stage 1, events
  inspectFile: gives<FileInspection>()(z.strictObject({ path, job })),
  readRows: gives<RowPage>()(z.strictObject({ path, from: count, count: z.int().min(1).max(MOST_PAGE_ROWS) })),
  /** A starting study from inspected files: roles by name and content, axes from the ranges. */
  proposeStudy: gives<ProposedStudy>()(
    z.strictObject({ files: z.array(path).min(1).max(MOST_PATTERNS), folder: path }),
  ),
  readEvents: gives<EventsRead>()(jobAtStudy),
  rejectedRows: gives<RejectedRows>()(
    atStudy.extend({
      reason: z.string().max(400).nullable(),
      from: count,
      count: z.int().min(1).max(MOST_PAGE_ROWS),
    }),
  ),

  // ---- stage 2, axes
  /** Of the values of a role over events that pass the cuts; range and spacing of the study's axis where not given. */
  histogram: gives<Histogram>()(
    atStudy.extend({
      of: whichAxis,
      bins: z.int().min(1).max(MOST_HISTOGRAM_BINS),
      from: z.number().optional(),
      to: z.number().optional(),
      spacing: z.enum(['linear', 'log']).optional(),
    }),
  ),
  suggestAxis: gives<AxisSuggestion>()(atStudy.extend({ axis: whichAxis, by: suggestion })),
  /** Reads the files again where the columns are not kept: then give a `job` for progress. */
  tally: gives<TallyView>()(atStudy.extend({ job: job.optional() })),

  // ---- stage 3, matrix
  posterior: gives<PosteriorView>()(atStudy),
  cell: gives<CellView>()(atStudy.extend({ column: count, outcome: count })),
  column: gives<ColumnView>()(atStudy.extend({ column: count })),
  replicas: gives<Replicas>()(atStudy.extend({ indices: z.array(count).min(1).max(MOST_REPLICAS_A_CALL) })),

  // ---- stage 4, audit
  audit: gives<AuditView>()(atStudy),
  influence: gives<InfluenceView>()(atStudy),
  plan: gives<PlanView>()(atStudy.extend({ target })),
  priorSensitivity: gives<PriorSensitivityView>()(jobAtStudy),
  rehearse: gives<RehearsalView>()(
    jobAtStudy.extend({ repetitions: z.int().min(1).max(1000), replica: count.optional() }),
  ),
  /** The study as it stands against a bundle that was chosen. */
  compare: gives<ComparisonView>()(jobAtStudy.extend({ bundle: path })),

  // ---- stage 5, hand over
  replicasNeeded: gives<ReplicasNeeded>()(jobAtStudy.extend({ digits: z.int().min(1).max(4) })),
  build: gives<BundleWritten>()(jobAtStudy.extend({ path, replace: z.boolean() })),
  verify: gives<Verification>()(z.strictObject({ bundle: path, job })),
  convert: gives<WrittenFiles>()(
    z.strictObject({
      bundle: path,
      to: z.enum(['npz', 'hdf5', 'parquet', 'arrow', 'csv', 'json', 'fits']),
      /** `[from, to)`; `null`: all of them, or none where the format holds none. */
      replicas: z.tuple([count, count]).nullable(),
      path,
      replace: z.boolean(),
      job,
    }),
  ),
  report: gives<WrittenFiles>()(z.strictObject({ bundle: path, path, pdf: z.boolean(), replace: z.boolean(), job })),
  /** A figure (PNG, SVG) or a table (CSV) made in the page. */
  saveFile: gives<WrittenFiles>()(
    z.strictObject({
      path,
      data: z.instanceof(Uint8Array).refine((bytes) => bytes.byteLength <= MOST_SAVED_BYTES, 'too large to save'),
      replace: z.boolean(),
    }),
  ),
};

export type CallName = keyof typeof BRIDGE;
/** What the page gives. */
export type Argument<Name extends CallName> = z.input<(typeof BRIDGE)[Name]['argument']>;
/** What the session gets, checked. */
export type Checked<Name extends CallName> = z.output<(typeof BRIDGE)[Name]['argument']>;
export type Result<Name extends CallName> = (typeof BRIDGE)[Name] extends Call<z.ZodType, infer Value> ? Value : never;

/** The bridge as the page sees it. */
export interface Bridge {
  transport: 'desktop' | 'loopback';
  call<Name extends CallName>(name: Name, argument: Argument<Name>): Promise<Answer<Result<Name>>>;
  /** Hears every notice until the returned function is called. */
  listen(listener: (notice: Notice) => void): () => void;
  /** Path of a file dropped on the window: the desktop knows it (and takes it as chosen), a browser does not. */
  pathOf(file: File): string | null;
  /** Resolves when the main side is gone (the loopback has ended): say so, the page can do nothing more. */
  ended: Promise<void>;
}
