import { untrack } from 'svelte';
import { SvelteMap } from 'svelte/reactivity';
import type {
  Argument,
  Bridge,
  ChosenFile,
  FileInspection,
  PosteriorView,
  Refusal,
  TallyView,
} from '../../main/bridge';
import { resolveAxis } from '../../src/study/resolve-axis';
import type { Study } from '../../src/study/study';
import { axesOf, type Axes } from './axes';
import type { Jobs } from './jobs.svelte';
import { Latest } from './latest.svelte';
import { baseName } from '../words/paths';
import type { StudyFile } from './study-file.svelte';

/** Files up to this size in all are read again by themselves when a cut or a role changes; larger ones on a button. */
export const READ_UNASKED_BYTES = 256e6;
/** The audit follows a change of limits or prior once it has rested this long. */
const AUDIT_REST = 250;

/** A matrix with all that its pictures draw on: counts, posterior, and the axes and study that they belong to. */
export interface KnownMatrix {
  study: Study;
  axes: Axes;
  tally: TallyView;
  posterior: PosteriorView;
}

/** What the engine answers about the study as it stands, each answer with the part of the study it rests on. */
export class Results {
  /** The files that the study's patterns name, and the patterns that name nothing. */
  files = $state.raw<ChosenFile[]>([]);
  problems = $state.raw<Refusal[]>([]);
  readonly inspections = new SvelteMap<string, FileInspection | Refusal>();
  readonly events: Latest<'readEvents', Omit<Argument<'readEvents'>, 'job'>>;
  readonly tally: Latest<'tally'>;
  readonly posterior: Latest<'posterior'>;
  readonly audit: Latest<'audit'>;
  /** The last matrix that was known whole: what the pictures show while the next one is on its way. */
  matrix = $state.raw<KnownMatrix | null>(null);
  #readAsked = $state('');
  #looked = '';

  /** The checked study, `null` where it is not valid. */
  readonly study = $derived.by(() => this.file.checked.study);
  readonly readKey = $derived.by(() => keyOf(this.file.folder, this.study, readPart));
  readonly tallyKey = $derived.by(() => keyOf(this.file.folder, this.study, tallyPart));
  readonly auditKey = $derived.by(() => keyOf(this.file.folder, this.study, auditPart));
  readonly bytes = $derived(this.files.reduce((sum, file) => sum + file.bytes, 0));
  readonly axes = $derived(this.study ? axesOf(this.study) : null);

  readonly read = $derived.by(() => this.events.answers(this.readKey));
  readonly tallied = $derived.by(() => this.read && this.tally.answers(this.tallyKey));
  readonly known = $derived.by(() => this.tallied && this.posterior.answers(this.tallyKey));
  readonly audited = $derived.by(() => this.audit.value !== null && this.audit.refusal === null);

  constructor(
    readonly bridge: Bridge,
    readonly jobs: Jobs,
    readonly file: StudyFile,
  ) {
    this.events = new Latest((argument) => jobs.run('Reading events', 'readEvents', argument));
    this.tally = new Latest((argument) => bridge.call('tally', argument));
    this.posterior = new Latest((argument) => bridge.call('posterior', argument));
    this.audit = new Latest((argument) => bridge.call('audit', argument));
    $effect(() => this.#followFiles());
    $effect(() => this.#follow());
    $effect(() => this.#followTally());
    $effect(() => this.#followPosterior());
    $effect(() => this.#keepMatrix());
    $effect(() => this.#followAudit());
  }

  /** Starts reading the events of the study as it stands. */
  readEvents(): void {
    if (!this.study) return;
    this.#readAsked = this.readKey;
    this.events.ask(this.readKey, { study: this.study, folder: this.file.folder });
  }

  /** Another study is open: nothing known of the one before is true of it. */
  forget(): void {
    for (const latest of [this.events, this.tally, this.posterior, this.audit]) latest.forget();
    this.#readAsked = this.#looked = '';
    this.matrix = null;
    this.files = [];
    this.problems = [];
    this.inspections.clear();
  }

  /** Finds the files of the patterns, and looks into those not looked into yet. */
  async look(patterns: string[], folder: string): Promise<void> {
    const asked = (this.#looked = JSON.stringify([patterns, folder]));
    const answer = patterns.length > 0 ? await this.bridge.call('chooseEvents', { patterns, folder }) : null;
    if (asked !== this.#looked) return;
    if (answer && !answer.ok) {
      this.problems = [answer];
      return;
    }
    this.files = answer?.value.files ?? [];
    this.problems = answer?.value.problems ?? [];
    for (const { path } of this.files) {
      if (asked === this.#looked && !this.inspections.has(path)) await this.inspect(path);
    }
  }

  async inspect(path: string): Promise<void> {
    const answer = await this.jobs.run(`Looking into ${baseName(path)}`, 'inspectFile', { path });
    if (answer.ok || answer.code !== 'cancelled') this.inspections.set(path, answer.ok ? answer.value : answer);
  }

  #question() {
    return { study: this.study!, folder: this.file.folder };
  }

  /** Undo, redo and a save elsewhere change the files too. */
  #followFiles(): void {
    const { files } = this.file.document.events;
    if (JSON.stringify([files, this.file.folder]) === this.#looked) return;
    untrack(() => void this.look(files, this.file.folder));
  }

  /** Reads again when what was read no longer answers the study, where that is quick. */
  #follow(): void {
    if (!this.study || !this.file.settled || this.#readAsked === '' || this.#readAsked === this.readKey) return;
    if (this.bytes <= READ_UNASKED_BYTES) untrack(() => this.readEvents());
  }

  #followTally(): void {
    if (!this.read || !this.study) return;
    this.tally.ask(this.tallyKey, this.#question());
  }

  #followPosterior(): void {
    if (!this.tallied || !this.file.settled) return;
    this.posterior.ask(this.tallyKey, this.#question());
  }

  #keepMatrix(): void {
    if (!this.known || !this.axes) return;
    this.matrix = { study: this.study!, axes: this.axes, tally: this.tally.value!, posterior: this.posterior.value! };
  }

  #followAudit(): (() => void) | void {
    if (!this.known) return;
    const key = this.auditKey;
    const question = this.#question();
    const timer = setTimeout(() => this.audit.ask(key, question), AUDIT_REST);
    return () => clearTimeout(timer);
  }
}

function keyOf(folder: string, study: Study | null, part: (study: Study) => unknown): string {
  return study ? JSON.stringify([folder, part(study)]) : '';
}

function readPart({ events, roles, cuts, lost, unmatched, axes }: Study): unknown {
  const tagged = [axes.true, axes.reconstructed].map((axis) => 'tags' in axis);
  return [events, roles, cuts, lost, unmatched, tagged];
}

function tallyPart(study: Study): unknown {
  const edges = [study.axes.true, study.axes.reconstructed].map((axis) => ({ ...resolveAxis(axis), label: '' }));
  const bare = edges.map((axis) => (axis.kind === 'numeric' ? { ...axis, edges: [...axis.edges], unit: '' } : axis));
  return [readPart(study), bare, study.prior, study.credibility];
}

function auditPart(study: Study): unknown {
  return [tallyPart(study), study.limits, study.reference, study.ensemble.seed];
}
