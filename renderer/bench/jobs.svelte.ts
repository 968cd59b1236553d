import type { Answer, Argument, Bridge, CallName, Notice, Progress, Result } from '../../main/bridge';

/** Work that takes long enough to be watched. */
export interface Job {
  id: string;
  title: string;
  progress: Progress | null;
  cancelling: boolean;
}

type JobCall = {
  [Name in CallName]: Argument<Name> extends { job?: string | undefined } ? Name : never;
}[CallName];
type Without<Name extends CallName> = Omit<Argument<Name>, 'job'>;

/** The jobs under way, newest last, with their progress as the main side tells it. */
export class Jobs {
  running = $state<Job[]>([]);

  constructor(readonly bridge: Bridge) {}

  /** Runs a call as a job that shows in the foot until it ends. */
  async run<Name extends JobCall>(title: string, name: Name, argument: Without<Name>): Promise<Answer<Result<Name>>> {
    const id = crypto.randomUUID();
    this.running.push({ id, title, progress: null, cancelling: false });
    try {
      return await this.bridge.call(name, { ...argument, job: id } as unknown as Argument<Name>);
    } finally {
      this.running = this.running.filter((job) => job.id !== id);
    }
  }

  hear(notice: Notice): void {
    if (notice.kind !== 'progress') return;
    const job = this.running.find(({ id }) => id === notice.job);
    if (job) job.progress = notice;
  }

  async cancel(id: string): Promise<void> {
    const job = this.running.find((one) => one.id === id);
    if (job) job.cancelling = true;
    await this.bridge.call('cancel', { job: id });
  }
}
