import { createHash } from 'node:crypto';
import { closeSync, openSync, writeSync } from 'node:fs';
import { open, type FileHandle } from 'node:fs/promises';
import { BLOCK, type SamplerParameters } from '../src/ensemble/draw';
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
  drawWorker: URL;
  workers: number;
  signal?: AbortSignal | undefined;
  onProgress?: ((progress: Progress) => void) | undefined;
}

/**
 * Draws an ensemble in worker threads straight into an NPY file, `[replica, column, outcome]`, and returns its size
 * and SHA-256. The bytes depend on parameters, seed and number of replicas alone. Throws `Cancelled` on the signal.
 */
export async function drawEnsemble(options: DrawOptions): Promise<{ bytes: number; sha256: string; shape: number[] }> {
  const { parameters, replicas, path } = options;
  const shape = [replicas, parameters.columns, parameters.outcomes];
  const header = npyHeader('<f8', shape);
  const file = openSync(path, 'w');
  writeSync(file, header);
  closeSync(file);
  const hash = createHash('sha256').update(header);
  const reader = await open(path, 'r');
  try {
    const blockBytes = BLOCK * parameters.columns * parameters.outcomes * 8;
    const total = header.length + replicas * parameters.columns * parameters.outcomes * 8;
    const hasher = new BlockHasher(reader, hash, header.length, blockBytes, total);
    await overBlocks(options, header.length, 'write', async (pool, block, w) => {
      await pool.call(w, 'write', { block });
      hasher.written(block);
    });
    await hasher.finish();
    return { bytes: total, sha256: hash.digest('hex'), shape };
  } finally {
    await reader.close();
  }
}

/** Draws an ensemble again and returns the first cell of the file that differs, or `null`. */
export async function checkEnsemble(options: DrawOptions, dataStart: number): Promise<Mismatch | null> {
  const found: Mismatch[] = [];
  await overBlocks(options, dataStart, 'check', async (pool, block, w) => {
    const mismatch = await pool.call(w, 'check', { block });
    if (mismatch) found.push(mismatch);
  });
  return found.sort((a, b) => a.replica - b.replica)[0] ?? null;
}

async function overBlocks(
  options: DrawOptions,
  dataStart: number,
  mode: 'write' | 'check',
  work: (pool: Pool<DrawCalls>, block: number, w: number) => Promise<void>,
): Promise<void> {
  const { parameters, seed, replicas, path, place, signal, onProgress } = options;
  const blocks = Array.from({ length: Math.ceil(replicas / BLOCK) }, (_, b) => b);
  if (blocks.length === 0) return;
  const size = Math.max(1, Math.min(options.workers, blocks.length));
  const pool = new Pool<DrawCalls>(options.drawWorker, size);
  let done = 0;
  await withPool(pool, signal, async () => {
    await pool.callAll('begin', { parameters, seed, replicas, path, place, dataStart, mode });
    await pool.share(blocks, async (block, _, w) => {
      await work(pool, block, w);
      done += Math.min(BLOCK, replicas - block * BLOCK);
      onProgress?.({ stage: mode === 'write' ? 'drawing' : 'checking', done, total: replicas, unit: 'replicas' });
    });
    await pool.callAll('end', null);
  });
}

const HASH_READ = 4 << 20;

/** Hashes a file in order while its blocks are written out of order by others. */
class BlockHasher {
  private readonly ready = new Set<number>();
  private next = 0;
  private at: number;
  private running: Promise<void> = Promise.resolve();
  private readonly buffer: Buffer;

  constructor(
    private readonly file: FileHandle,
    private readonly hash: ReturnType<typeof createHash>,
    dataStart: number,
    private readonly blockBytes: number,
    private readonly total: number,
  ) {
    this.at = dataStart;
    this.buffer = Buffer.allocUnsafe(Math.min(HASH_READ, Math.max(1, blockBytes)));
  }

  /** Block `block` stands in the file. */
  written(block: number): void {
    this.ready.add(block);
    while (this.ready.delete(this.next)) {
      this.next++;
      this.running = this.running.then(() => this.hashTo(Math.min(this.total, this.at + this.blockBytes)));
    }
  }

  async finish(): Promise<void> {
    await this.running;
  }

  private async hashTo(end: number): Promise<void> {
    while (this.at < end) {
      const { bytesRead } = await this.file.read(this.buffer, 0, Math.min(this.buffer.length, end - this.at), this.at);
      if (bytesRead === 0) throw new Error('the ensemble ended while it was hashed');
      this.hash.update(this.buffer.subarray(0, bytesRead));
      this.at += bytesRead;
    }
  }
}
