import { createHash } from 'node:crypto';
import { closeSync, openSync } from 'node:fs';
import { BLOCK, type SamplerParameters } from '../src/ensemble/draw';
import { cannotWrite, writeWhole } from '../src/handover/folder-in-the-making';
import { npyHeader } from '../src/handover/npy';
import { Pool, withPool } from './pool';
import type { Progress } from './progress';
import type { DrawCalls, Mismatch } from './workers/draw-task';

export interface DrawOptions {
  parameters: SamplerParameters;
  seed: number;
  replicas: number;
  /** The NPY file of the ensemble. */
  path: string;
  /** Names the place in errors. */
  place: string;
  /** Bytes that may be drawn ahead of the writing, where the main thread has other work meanwhile. */
  ahead?: number;
  drawWorker: URL;
  workers: number;
  signal?: AbortSignal | undefined;
  onProgress?: ((progress: Progress) => void) | undefined;
}

/**
 * Draws an ensemble in worker threads into an NPY file, `[replica, column, outcome]`, and returns its size and, where
 * `hashed`, its SHA-256 (else empty). The bytes depend on parameters, seed and number of replicas alone. Throws `Cancelled` on the signal and
 * `InputError` where the place has no room.
 */
export async function drawEnsemble(
  options: DrawOptions,
  hashed = true,
): Promise<{ bytes: number; sha256: string; shape: number[] }> {
  const { parameters, replicas, path, place } = options;
  const cells = parameters.columns * parameters.outcomes;
  const shape = [replicas, parameters.columns, parameters.outcomes];
  const file = openSync(path, 'w');
  const hash = createHash('sha256');
  let bytes = 0;
  const put = (piece: Uint8Array): void => {
    try {
      writeWhole(file, piece);
    } catch (cause) {
      throw cannotWrite(place, cause);
    }
    if (hashed) hash.update(piece);
    bytes += piece.length;
  };
  try {
    put(npyHeader('<f8', shape));
    // One writer, in order: workers that write to one file wait for each other longer than the writing takes.
    const blockBytes = BLOCK * cells * 8;
    const slots = new Slots(Math.max(options.workers + 2, Math.floor((options.ahead ?? 0) / blockBytes)), blockBytes);
    const inOrder = new InOrder<SharedArrayBuffer>((into, block) => {
      put(new Uint8Array(into, 0, Math.min(BLOCK, replicas - block * BLOCK) * cells * 8));
      slots.give(into);
    });
    await overBlocks(options, 'drawing', async (pool, block, w) => {
      const into = await slots.take();
      await pool.call(w, 'draw', { block, into });
      inOrder.add(into, block);
    });
  } finally {
    closeSync(file);
  }
  return { bytes, sha256: hashed ? hash.digest('hex') : '', shape };
}

/** Draws an ensemble again and returns the first cell of the file that differs, or `null`. */
export async function checkEnsemble(options: DrawOptions, dataStart: number): Promise<Mismatch | null> {
  const found: Mismatch[] = [];
  await overBlocks(options, 'checking', async (pool, block, w) => {
    const mismatch = await pool.call(w, 'check', { block, path: options.path, dataStart });
    if (mismatch) found.push(mismatch);
  });
  return found.sort((a, b) => a.replica - b.replica)[0] ?? null;
}

async function overBlocks(
  options: DrawOptions,
  stage: 'drawing' | 'checking',
  work: (pool: Pool<DrawCalls>, block: number, w: number) => Promise<void>,
): Promise<void> {
  const { parameters, seed, replicas, signal, onProgress } = options;
  const blocks = Array.from({ length: Math.ceil(replicas / BLOCK) }, (_, b) => b);
  if (blocks.length === 0) return;
  const pool = new Pool<DrawCalls>(options.drawWorker, Math.max(1, Math.min(options.workers, blocks.length)));
  let done = 0;
  await withPool(pool, signal, async () => {
    const { columns, outcomes, shape, scale } = parameters;
    await pool.callAll('begin', { parameters: { columns, outcomes, shape, scale }, seed, replicas });
    // Two blocks at once: none waits while the main thread writes the other.
    await pool.share(
      blocks,
      async (block, _, w) => {
        await work(pool, block, w);
        done += Math.min(BLOCK, replicas - block * BLOCK);
        onProgress?.({ stage, done, total: replicas, unit: 'replicas' });
      },
      2,
    );
  });
}

/** Shared memory for blocks, handed out in the order it is asked for: memory stays bounded however many blocks. */
class Slots {
  private readonly free: SharedArrayBuffer[] = [];
  private readonly waiting: ((slot: SharedArrayBuffer) => void)[] = [];
  private made = 0;

  constructor(
    private readonly most: number,
    private readonly bytes: number,
  ) {}

  take(): Promise<SharedArrayBuffer> {
    if (this.free.length === 0 && this.made < this.most) {
      this.made++;
      this.free.push(new SharedArrayBuffer(this.bytes));
    }
    const slot = this.free.pop();
    return slot ? Promise.resolve(slot) : new Promise((resolve) => this.waiting.push(resolve));
  }

  give(slot: SharedArrayBuffer): void {
    const next = this.waiting.shift();
    if (next) next(slot);
    else this.free.push(slot);
  }
}

/** Passes things on in the order of their numbers, however they come. */
class InOrder<T> {
  private readonly held = new Map<number, T>();
  private next = 0;

  constructor(private readonly pass: (thing: T, number: number) => void) {}

  add(thing: T, number: number): void {
    this.held.set(number, thing);
    for (let due = this.held.get(this.next); due !== undefined; due = this.held.get(this.next)) {
      this.held.delete(this.next);
      this.pass(due, this.next++);
    }
  }
}
