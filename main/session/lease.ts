import { Cancelled, InputError } from '../../src/study/input-error';
import { Pool, type Calls } from '../pool';

/**
 * Workers that are lent for one piece of work and kept for the next: starting one takes longer than most of that work.
 * One whose work was cancelled is ended.
 */
export class Lease<C extends Calls> {
  private idle: Pool<C>[] = [];
  private readonly all = new Set<Pool<C>>();

  constructor(private readonly entry: URL) {}

  /** Lends a pool of one worker to `work`. Rejects as `Cancelled` once the signal is aborted. */
  async lend<T>(signal: AbortSignal | undefined, work: (pool: Pool<C>) => Promise<T>): Promise<T> {
    if (signal?.aborted) throw new Cancelled();
    const pool = this.idle.pop() ?? this.start();
    const cancel = (): void => void this.stop(pool);
    signal?.addEventListener('abort', cancel, { once: true });
    try {
      return await work(pool);
    } catch (error) {
      // A worker that failed otherwise than by bad input may be gone: it is not lent again.
      if (!(error instanceof InputError)) await this.stop(pool);
      throw error;
    } finally {
      signal?.removeEventListener('abort', cancel);
      if (this.all.has(pool)) this.idle.push(pool);
    }
  }

  async end(): Promise<void> {
    await Promise.all([...this.all].map((pool) => this.stop(pool)));
  }

  private start(): Pool<C> {
    const pool = new Pool<C>(this.entry, 1);
    this.all.add(pool);
    return pool;
  }

  private async stop(pool: Pool<C>): Promise<void> {
    this.all.delete(pool);
    this.idle = this.idle.filter((other) => other !== pool);
    await pool.stop();
  }
}
