import { Cancelled, InputError } from '../../src/study/input-error';
import type { KeyedTally } from './study-events';
import { Pool } from '../pool';
import type { MatrixCalls } from '../workers/matrix-task';

type Name = Exclude<keyof MatrixCalls, 'take'>;

/**
 * The worker that holds tallies and works out what follows from them. It is started when first asked, and started again
 * after work in it was cancelled. Each tally is sent once.
 */
export class MatrixThread {
  private pool: Pool<MatrixCalls> | null = null;
  private sent: string[] = [];

  constructor(private readonly entry: URL) {}

  /** Calls `name` about a tally. On the signal the worker is ended, and the call rejects as `Cancelled`. */
  async ask<N extends Name>(
    { key, tally }: Pick<KeyedTally, 'key' | 'tally'> & Partial<KeyedTally>,
    name: N,
    argument: Omit<MatrixCalls[N]['argument'], 'key'>,
    job: { signal?: AbortSignal; onNote?: (note: unknown) => void } = {},
  ): Promise<MatrixCalls[N]['result']> {
    const pool = (this.pool ??= new Pool<MatrixCalls>(this.entry, 1));
    if (job.signal?.aborted) throw new Cancelled();
    const cancel = (): void => void this.end();
    job.signal?.addEventListener('abort', cancel, { once: true });
    try {
      const sending = this.send(pool, key, tally);
      const asking = pool.call(0, name, { ...argument, key } as MatrixCalls[N]['argument'], job.onNote);
      await sending;
      return await asking;
    } catch (error) {
      // A worker that failed otherwise than by bad input may be gone: the next call starts another.
      if (!(error instanceof InputError) && this.pool === pool) await this.end();
      throw error;
    } finally {
      job.signal?.removeEventListener('abort', cancel);
    }
  }

  async end(): Promise<void> {
    const old = this.pool;
    this.pool = null;
    this.sent = [];
    await old?.stop();
  }

  /** The worker keeps the last few tallies by use, as this list does; what it has dropped is sent again. */
  private async send(pool: Pool<MatrixCalls>, key: string, tally: KeyedTally['tally']): Promise<void> {
    const known = this.sent.includes(key);
    this.sent = [...this.sent.filter((other) => other !== key), key].slice(-MOST_SENT);
    if (!known) await pool.call(0, 'take', { key, tally });
  }
}

/** Fewer than the worker keeps, so that no tally named here is gone there. */
const MOST_SENT = 6;
