import { Cancelled } from '../../src/study/input-error';
import type { Progress as ToldProgress } from '../bridge';
import type { Progress } from '../progress';
import { Refused } from './refusal';

/** Notices of one job are at least this far apart: a bar needs no more, and the window is not flooded. */
const NOTICE_GAP_MS = 100;
/** A rate is told once so much time has passed that it means something. */
const RATE_AFTER_MS = 300;

export interface Job {
  signal: AbortSignal;
  progress: (progress: Progress) => void;
}

const PHASES: Record<Progress['stage'], string> = {
  reading: 'Reading events',
  drawing: 'Drawing replicas',
  checking: 'Checking',
  writing: 'Writing',
  rehearsing: 'Rehearsing',
};

/** The jobs of one window: each has a name given by the page, progress, and can be cancelled. */
export class Jobs {
  private readonly running = new Map<string, AbortController>();

  constructor(
    private readonly tell: (progress: ToldProgress) => void,
    private readonly now: () => number = () => performance.now(),
  ) {}

  /** Runs `work` as the job `name` until it ends. Throws `Refused` where a job of that name runs already. */
  async run<T>(name: string, work: (job: Job) => Promise<T>): Promise<T> {
    if (this.running.has(name))
      throw new Refused('refused', `job ${name}`, 'runs already', 'give each job its own name');
    const controller = new AbortController();
    this.running.set(name, controller);
    try {
      return await work({ signal: controller.signal, progress: this.teller(name) });
    } catch (error) {
      // Work that was stopped from outside may end with any error.
      throw controller.signal.aborted ? new Cancelled() : error;
    } finally {
      this.running.delete(name);
    }
  }

  cancel(name: string): boolean {
    const controller = this.running.get(name);
    controller?.abort();
    return controller !== undefined;
  }

  cancelAll(): void {
    this.running.forEach((controller) => controller.abort());
  }

  private teller(job: string): (progress: Progress) => void {
    let stage: Progress['stage'] | null = null;
    let began = 0;
    let told = -Infinity;
    return (progress) => {
      const now = this.now();
      if (progress.stage !== stage) [stage, began, told] = [progress.stage, now, -Infinity];
      const ended = progress.done >= progress.total;
      if (now - told < NOTICE_GAP_MS && !ended) return;
      told = now;
      this.tell(toldProgress(job, progress, now - began));
    };
  }
}

/** Progress with the rate since its stage began, and the time left at that rate. */
export function toldProgress(job: string, progress: Progress, elapsedMs: number): ToldProgress {
  const { stage, done, total, unit, rows } = progress;
  const rate = elapsedMs >= RATE_AFTER_MS ? (1000 * done) / elapsedMs : null;
  const secondsLeft = rate !== null && rate > 0 ? Math.max(0, total - done) / rate : null;
  return { kind: 'progress', job, phase: PHASES[stage], done, total, unit, rate, secondsLeft, rows: rows ?? null };
}
