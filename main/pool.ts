import { Worker } from 'node:worker_threads';
import { Cancelled, InputError } from '../src/study/input-error';

/** What a worker answers to one call. Errors cross as plain data: a clone would lose their class. */
export type Answer =
  | { id: number; done: unknown }
  | { id: number; note: unknown }
  | { id: number; fault: { where?: string; what: string; remedy?: string; stack?: string } };

/** A typed table of a worker's calls: name to argument and result. */
export type Calls = Record<string, { argument: unknown; result: unknown }>;

interface Waiting {
  resolve(value: unknown): void;
  reject(error: Error): void;
  onNote: ((note: unknown) => void) | undefined;
}

const started = new Map<string, Worker[]>();

/**
 * Starts workers before it is known what they will be told: they load while the program does. The next pool of the same
 * entry takes them; those it does not want it ends.
 */
export function startEarly(entry: URL, count: number): void {
  started.set(
    entry.href,
    Array.from({ length: count }, () => new Worker(entry)),
  );
}

function startedEarly(entry: URL, size: number): Worker[] {
  const ready = started.get(entry.href) ?? [];
  started.delete(entry.href);
  for (const worker of ready.slice(size)) void worker.terminate();
  return ready.slice(0, size);
}

/** Ends what was started early and never taken: a command that failed before it came to its work. */
export function endStartedEarly(): void {
  for (const entry of started.keys()) startedEarly(new URL(entry), 0);
}

/** Workers of one kind, each with its own state, called by index. */
export class Pool<C extends Calls> {
  private readonly workers: Worker[];
  private readonly waiting: Map<number, Waiting>[];
  private nextId = 0;
  private stopped = false;

  /** `entry` is the built worker file; see `workers/serve.ts` for the other end. */
  constructor(
    entry: URL,
    readonly size: number,
  ) {
    this.waiting = Array.from({ length: size }, () => new Map());
    const ready = startedEarly(entry, size);
    this.workers = Array.from({ length: size }, (_, w) => this.listen(ready[w] ?? new Worker(entry), w));
  }

  /** Calls `name` on worker `w`. Rejects with the worker's `InputError`, `Cancelled` after `stop`, or a fault. */
  call<N extends keyof C & string>(
    w: number,
    name: N,
    argument: C[N]['argument'],
    onNote?: (note: unknown) => void,
  ): Promise<C[N]['result']> {
    if (this.stopped) return Promise.reject(new Cancelled());
    const id = this.nextId++;
    return new Promise((resolve, reject) => {
      this.waiting[w]!.set(id, { resolve: resolve as (value: unknown) => void, reject, onNote });
      this.workers[w]!.postMessage({ id, name, argument });
    });
  }

  /** The same call on every worker, all at once. */
  callAll<N extends keyof C & string>(name: N, argument: C[N]['argument']): Promise<C[N]['result'][]> {
    return Promise.all(this.workers.map((_, w) => this.call(w, name, argument)));
  }

  /** Hands `items` to whichever worker is free, `atOnce` to each, in order. Stops handing out at the first fault. */
  async share<T>(
    items: readonly T[],
    work: (item: T, index: number, w: number) => Promise<void>,
    atOnce = 1,
  ): Promise<void> {
    let next = 0;
    let failed = false;
    const lane = async (w: number): Promise<void> => {
      while (next < items.length && !failed) {
        const index = next++;
        try {
          await work(items[index]!, index, w);
        } catch (error) {
          failed = true;
          throw error;
        }
      }
    };
    const lanes = Array.from({ length: atOnce }, () => this.workers.map((_, w) => lane(w)));
    const ends = await Promise.allSettled(lanes.flat());
    const fault = ends.find((end) => end.status === 'rejected');
    if (fault) throw fault.reason;
  }

  /** Ends every worker at once; calls under way reject as cancelled. */
  async stop(): Promise<void> {
    this.stopped = true;
    for (const calls of this.waiting) {
      for (const { reject } of calls.values()) reject(new Cancelled());
      calls.clear();
    }
    await Promise.all(this.workers.map((worker) => worker.terminate()));
  }

  private listen(worker: Worker, w: number): Worker {
    worker.on('message', (answer: Answer) => this.receive(w, answer));
    worker.on('error', (error: Error) => this.fail(w, error));
    worker.on('exit', () => this.fail(w, new Error('a worker ended before its work was done')));
    return worker;
  }

  private receive(w: number, answer: Answer): void {
    const call = this.waiting[w]!.get(answer.id);
    if (!call) return;
    if ('note' in answer) {
      call.onNote?.(answer.note);
      return;
    }
    this.waiting[w]!.delete(answer.id);
    if ('done' in answer) call.resolve(answer.done);
    else call.reject(faultOf(answer.fault));
  }

  private fail(w: number, error: Error): void {
    for (const { reject } of this.waiting[w]!.values()) reject(error);
    this.waiting[w]!.clear();
  }
}

function faultOf({
  where,
  what,
  remedy,
  stack,
}: {
  where?: string;
  what: string;
  remedy?: string;
  stack?: string;
}): Error {
  if (where !== undefined) return new InputError(where, what, remedy ?? '');
  const error = new Error(what);
  if (stack !== undefined) error.stack = stack;
  return error;
}

/** Runs `work` with a pool, and stops the pool whether it ends well, fails or is cancelled. */
export async function withPool<C extends Calls, T>(
  pool: Pool<C>,
  signal: AbortSignal | undefined,
  work: (pool: Pool<C>) => Promise<T>,
): Promise<T> {
  const cancel = (): void => void pool.stop();
  signal?.addEventListener('abort', cancel, { once: true });
  try {
    if (signal?.aborted) throw new Cancelled();
    return await work(pool);
  } finally {
    signal?.removeEventListener('abort', cancel);
    await pool.stop();
  }
}
