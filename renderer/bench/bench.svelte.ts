import { createContext } from 'svelte';
import type {
  Bridge,
  BundleWritten,
  Notice,
  OpenedStudy,
  ProposedStudy,
  RecentStudy,
  Refusal,
  StartFacts,
} from '../../main/bridge';
import type { Study } from '../../src/study/study';
import type { AuditView as AuditViewName } from '../stages/audit-views';
import { ThemeSwitch } from '../theme/theme.svelte';
import { Chooser, fileStem } from './choosing.svelte';
import { Chosen } from './chosen.svelte';
import { Jobs } from './jobs.svelte';
import { Looks } from './looks.svelte';
import { Results } from './results.svelte';
import { blankStudy, StudyFile } from './study-file.svelte';
import { isForField } from './text-field';

export type StageName = 'events' | 'axes' | 'matrix' | 'audit' | 'hand-over';
export const STAGE_TITLES: Record<StageName, string> = {
  events: 'Events',
  axes: 'Axes',
  matrix: 'Matrix',
  audit: 'Audit',
  'hand-over': 'Hand over',
};
export const STAGES: readonly StageName[] = ['events', 'axes', 'matrix', 'audit', 'hand-over'];

/** What takes the place of the stage for a moment. */
export type Sheet = 'shortcuts' | 'about' | null;

/** A draft is written when edits have rested this long. */
const DRAFT_REST = 800;

/** The whole state of the window: the study, what is known of it, what is chosen, what is under way. */
export class Bench {
  readonly file: StudyFile;
  readonly jobs: Jobs;
  readonly results: Results;
  readonly choosing: Chooser;
  readonly chosen = new Chosen();
  readonly theme = new ThemeSwitch();
  readonly looks = new Looks();
  stage = $state<StageName>('events');
  sheet = $state<Sheet>(null);
  recent = $state.raw<RecentStudy[]>([]);
  /** A fault of opening or saving, shown under the title until the next attempt. */
  refusal = $state.raw<Refusal | null>(null);
  /** One sentence on what was just done, read out and shown in the foot. */
  said = $state('');
  ended = $state(false);
  /** Why each role was proposed. */
  reasons = $state.raw<ProposedStudy['reasons']>({});
  auditView = $state<AuditViewName>('flags');
  /** The last bundle that this window wrote. */
  written = $state.raw<BundleWritten | null>(null);

  constructor(
    readonly bridge: Bridge,
    readonly facts: StartFacts,
  ) {
    this.file = new StudyFile(facts.folder);
    this.jobs = new Jobs(bridge);
    this.choosing = new Chooser(bridge);
    this.results = new Results(bridge, this.jobs, this.file);
    this.recent = facts.recent;
    void bridge.ended.then(() => (this.ended = true));
    bridge.listen((notice) => this.#hear(notice));
    $effect(() => this.#keepDraft());
    $effect(() => this.#tellTitle());
    $effect(() => this.#keepChoice());
  }

  say(sentence: string): void {
    this.said = sentence;
  }

  go(stage: StageName): void {
    if (stage !== this.stage) this.chosen.keepFor(stage);
    this.stage = stage;
    this.sheet = null;
    this.choosing.leave();
  }

  goAudit(view: AuditViewName): void {
    this.auditView = view;
    this.go('audit');
  }

  newStudy(): void {
    this.#take(blankStudy(), this.facts.folder, null, true);
  }

  async openStudy(path: string): Promise<void> {
    const answer = await this.bridge.call('openStudy', { path });
    this.refusal = answer.ok ? null : answer;
    if (answer.ok) await this.#opened(answer.value);
    await this.#listRecent();
  }

  /** Takes up the study that an earlier window left without saving. */
  async takeDraft(): Promise<void> {
    const draft = this.facts.draft;
    if (!draft) return;
    this.#take(draft.study as Study, draft.folder, draft.path, false);
    await this.#lookAndRead();
  }

  async askStudy(): Promise<void> {
    const paths = await this.choosing.ask({ purpose: 'study', title: 'Open a study', verb: 'Open' });
    if (paths?.[0] !== undefined) await this.openStudy(paths[0]);
  }

  async askEvents(): Promise<void> {
    const paths = await this.choosing.ask({ purpose: 'events', title: 'Add event files', verb: 'Add' });
    if (paths) await this.addEvents(paths);
  }

  /** Adds paths or patterns to the study and looks into the files that they name. */
  async addEvents(patterns: string[]): Promise<void> {
    const { file, results } = this;
    this.go('events');
    const answer = await this.bridge.call('chooseEvents', { patterns, folder: file.folder });
    const problem = answer.ok ? answer.value.problems[0] : answer;
    this.refusal = problem ?? null;
    if (!answer.ok || answer.value.files.length === 0) return;
    const typed = patterns.some((pattern) => /[*?[{]/.test(pattern));
    const names = typed ? patterns : answer.value.files.map(({ name }) => name);
    const known = file.document.events.files;
    const files = [...known, ...names.filter((name) => !known.includes(name))];
    file.set('events', { files });
    await results.look(files, file.folder);
    if (file.document.roles.true === '') await this.propose();
  }

  /** Roles and axes as the files suggest them, where the study has none yet. */
  async propose(): Promise<void> {
    const { file, results } = this;
    const files = results.files.map(({ path }) => path);
    if (files.length === 0) return;
    const answer = await this.bridge.call('proposeStudy', { files, folder: file.folder });
    if (!answer.ok) return;
    const { roles, axes, lost } = answer.value.study;
    this.reasons = answer.value.reasons;
    file.edit((document) => ({ ...document, roles, axes: axes as Study['axes'], lost: lost ?? document.lost }));
  }

  /** Saves to the study's own file, or asks for a place where it has none. */
  async save(): Promise<void> {
    if (this.file.path === null) await this.saveAs();
    else await this.#saveTo(this.file.path, true);
  }

  async saveAs(): Promise<void> {
    const suggested = `${fileStem(this.file.document.title)}.study.json`;
    const place = await this.choosing.place({ title: 'Save the study', verb: 'Save', place: 'study', suggested });
    if (place) await this.#saveTo(place.path, place.replace);
  }

  async #saveTo(path: string, replace: boolean): Promise<void> {
    const { document, folder } = this.file;
    const answer = await this.bridge.call('saveStudy', { study: document, folder, path, replace });
    this.refusal = answer.ok ? null : answer;
    if (!answer.ok) return;
    this.file.markSaved(answer.value.study as Study, answer.value.folder, answer.value.path);
    this.say(`Saved ${answer.value.path}`);
    await this.bridge.call('dropDraft', {});
    await this.#listRecent();
  }

  #take(study: Study, folder: string, path: string | null, saved: boolean): void {
    this.results.forget();
    this.chosen.clear();
    this.written = null;
    this.file.open(study, folder, path, saved);
    this.go('events');
  }

  async #opened({ study, folder, path, files, problems }: OpenedStudy): Promise<void> {
    this.#take(study, folder, path, true);
    this.results.files = files;
    this.results.problems = problems;
    await this.#lookAndRead();
  }

  /** A study that is complete is read at once; looking into its files goes on beside it. */
  async #lookAndRead(): Promise<void> {
    const { results, file } = this;
    const looking = results.look(file.document.events.files, file.folder);
    if (results.problems.length === 0) results.readEvents();
    await looking;
  }

  async #listRecent(): Promise<void> {
    const answer = await this.bridge.call('recentStudies', {});
    if (answer.ok) this.recent = answer.value;
  }

  #keepDraft(): (() => void) | void {
    const { document, folder, path, edited } = this.file;
    if (!edited) return;
    const timer = setTimeout(() => void this.bridge.call('keepDraft', { study: document, folder, path }), DRAFT_REST);
    return () => clearTimeout(timer);
  }

  #tellTitle(): void {
    const { document, edited } = this.file;
    globalThis.document.title = `${document.title}${edited ? ' (edited)' : ''}`;
    void this.bridge.call('setTitle', { title: document.title, edited });
  }

  #keepChoice(): void {
    const tally = this.results.tally.value;
    if (tally) this.chosen.keepWithin(tally.columnNames.length, tally.outcomeNames.length);
  }

  #hear(notice: Notice): void {
    if (notice.kind === 'progress') this.jobs.hear(notice);
    else if (notice.kind === 'open') void this.openStudy(notice.path);
    else if (isForField(notice.command)) document.execCommand(notice.command);
    else this.command(notice.command);
  }

  /** Does what a menu or a key asks for. */
  command(command: Command): void {
    const stage = /^stage-(\d)$/.exec(command);
    if (stage) this.go(STAGES[Number(stage[1]) - 1]!);
    else COMMANDS[command as PlainCommand](this);
  }
}

export type Command = Extract<Notice, { kind: 'command' }>['command'];
type PlainCommand = Exclude<Command, `stage-${number}`>;

const COMMANDS: Record<PlainCommand, (bench: Bench) => void> = {
  new: (bench) => bench.newStudy(),
  open: (bench) => void bench.askStudy(),
  'open-events': (bench) => void bench.askEvents(),
  save: (bench) => void bench.save(),
  'save-as': (bench) => void bench.saveAs(),
  undo: (bench) => bench.file.undo(),
  redo: (bench) => bench.file.redo(),
  shortcuts: (bench) => (bench.sheet = 'shortcuts'),
  about: (bench) => (bench.sheet = 'about'),
};

export const [useBench, provideBench] = createContext<Bench>();
