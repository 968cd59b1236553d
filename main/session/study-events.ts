import { statSync } from 'node:fs';
import { canonicalJson } from '../../src/study/fingerprint';
import { Cancelled } from '../../src/study/input-error';
import type { NamedFile } from '../../src/study/paths';
import type { Study } from '../../src/study/study';
import type { Tally } from '../../src/tally/tally';
import type { Progress } from '../progress';
import { readEvents, type Reading } from '../read-events';

/** A study whose files were found and may be read. */
export interface StudyFiles {
  study: Study;
  folder: string;
  files: NamedFile[];
}

/** A tally and the key it is known by: equal keys, equal tallies. */
export interface KeyedTally {
  key: string;
  tally: Tally;
  /** Whether files were read for it. */
  wasRead: boolean;
}

export interface ReadSettings {
  readWorker: URL;
  workers: number;
  /** Bytes of event columns kept in memory. */
  keep: number;
}

interface ReadJob {
  signal?: AbortSignal | undefined;
  onProgress?: ((progress: Progress) => void) | undefined;
}

/** Tallies kept: the present one and those an undo goes back to. */
const MOST_TALLIES = 8;

/**
 * The events of the study at hand: read once, kept in the read workers where they fit, and tallied again under other
 * axes without reading. Where they do not fit, another tally reads the files again.
 */
export class StudyEvents {
  private reading: { key: string; reading: Reading } | null = null;
  private readonly tallies = new Map<string, Tally>();
  /** One reading or tallying at a time: each uses every worker. */
  private last: Promise<unknown> = Promise.resolve();

  constructor(private readonly settings: ReadSettings) {}

  /** The reading of the study, whatever its axes; reads the files where roles, cuts or files have changed. */
  read(at: StudyFiles, job: ReadJob): Promise<{ reading: Reading; wasRead: boolean }> {
    return this.inTurn(() => this.readNow(at, job));
  }

  /** The tally of the study. Reads the files where they were not read, or could not be kept. */
  tally(at: StudyFiles, job: ReadJob): Promise<KeyedTally> {
    return this.inTurn(() => this.tallyNow(at, job));
  }

  /**
   * The tally of the same events under other axes and roles, for a histogram or a suggestion: it takes no one's place.
   * `study` may differ from `at.study` in its numeric axes, and lack its weight and run.
   */
  apart(at: StudyFiles, study: Study, job: ReadJob): Promise<Tally> {
    return this.inTurn(async () => {
      const { reading } = await this.readNow(at, job);
      if (reading.store) return reading.store.retally(study);
      const { folder, files } = at;
      const again = await readEvents({
        study,
        folder,
        files,
        where: 'study',
        ...this.settings,
        keep: 0,
        ...options(job),
      });
      await again.close();
      return again.tally;
    });
  }

  /** The reading that a bundle of this study is built from, its tally that of the study's own axes. */
  source(at: StudyFiles, job: ReadJob): Promise<KeyedTally & { reading: Reading }> {
    return this.inTurn(async () => {
      const keyed = await this.tallyNow(at, job);
      return { ...keyed, reading: this.reading!.reading };
    });
  }

  /** What is known without reading: `null` where the study's events are not read as they stand. */
  known(at: StudyFiles): Reading | null {
    return this.reading?.key === readingKey(at) ? this.reading.reading : null;
  }

  async close(): Promise<void> {
    await this.last.catch(() => undefined);
    await this.forget();
  }

  private async readNow(at: StudyFiles, job: ReadJob): Promise<{ reading: Reading; wasRead: boolean }> {
    const key = readingKey(at);
    if (this.reading?.key === key) return { reading: this.reading.reading, wasRead: false };
    await this.forget();
    const { study, folder, files } = at;
    const reading = await readEvents({ study, folder, files, where: 'study', ...this.settings, ...options(job) });
    this.reading = { key, reading };
    this.keepTally(tallyKey(key, study), reading.tally);
    return { reading, wasRead: true };
  }

  private async tallyNow(at: StudyFiles, job: ReadJob): Promise<KeyedTally> {
    const key = tallyKey(readingKey(at), at.study);
    const isKnown = this.reading?.key === readingKey(at);
    const kept = isKnown ? this.tallies.get(key) : undefined;
    if (kept) return { key, tally: kept, wasRead: false };
    if (isKnown && this.reading!.reading.store) {
      const tally = await this.reading!.reading.store.retally(at.study);
      this.keepTally(key, tally);
      return { key, tally, wasRead: false };
    }
    // The events are not in memory: the files are read again under the new axes.
    if (isKnown) await this.forget();
    const { reading } = await this.readNow(at, job);
    return { key, tally: reading.tally, wasRead: true };
  }

  private keepTally(key: string, tally: Tally): void {
    this.tallies.set(key, tally);
    if (this.tallies.size > MOST_TALLIES) this.tallies.delete(this.tallies.keys().next().value!);
  }

  private async forget(): Promise<void> {
    const old = this.reading;
    this.reading = null;
    this.tallies.clear();
    await old?.reading.close();
  }

  private inTurn<T>(work: () => Promise<T>): Promise<T> {
    const turn = this.last.catch(() => undefined).then(work);
    this.last = turn;
    return turn;
  }
}

function options({ signal, onProgress }: ReadJob) {
  if (signal?.aborted) throw new Cancelled();
  return { signal, ...(onProgress && { onProgress }) };
}

/**
 * What a reading depends on: the files as they are on disk, roles, cuts, what is done with incomplete rows, and the
 * kind of the axes (kept tags are indices into the study's list of tags).
 */
export function readingKey({ study, files }: StudyFiles): string {
  const onDisk = files.map(({ path, name }) => {
    const { size, mtimeMs } = statSync(path);
    return [path, name, size, mtimeMs];
  });
  const tags = [study.axes.true, study.axes.reconstructed].map((axis) => ('tags' in axis ? axis.tags : null));
  return canonicalJson([onDisk, study.roles, study.cuts, study.lost, study.unmatched, tags]);
}

/** A tally depends on the edges besides; labels and units of the axes change nothing in it. */
function tallyKey(reading: string, { axes }: Study): string {
  const edges = [axes.true, axes.reconstructed].map((axis) => {
    if ('tags' in axis) return axis.tags;
    return 'edges' in axis ? [axis.edges, axis.spacing] : [axis.from, axis.to, axis.bins, axis.spacing];
  });
  return canonicalJson([reading, edges]);
}
