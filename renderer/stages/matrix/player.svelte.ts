import type { Bridge, Refusal } from '../../../main/bridge';
import type { KnownMatrix } from '../../bench/results.svelte';
import { ReplicaCache } from './replica-cache';

/** Replicas a second, also for eyes that asked for less motion. */
const RATE = { usual: 10, calm: 1.5 };
/** Bytes of replicas asked for in one call, and kept at most. */
const CALL_BYTES = 2e6;
const KEPT_BYTES = 64e6;
const MOST_A_CALL = 64;

/** Steps through the replicas of a matrix: the very numbers that a bundle will hold. */
export class Player {
  at = $state(0);
  playing = $state(false);
  refusal = $state.raw<Refusal | null>(null);
  /** Grows when replicas come in: what was read from the cache is then read again. */
  #came = $state(0);
  #matrix = $state.raw<KnownMatrix | null>(null);
  #cache = new ReplicaCache(1, 0);
  #folder = '';
  #timer: ReturnType<typeof setTimeout> | undefined;

  constructor(readonly bridge: Bridge) {}

  get values(): Float64Array | null {
    return this.#came >= 0 ? this.#cache.get(this.at) : null;
  }

  get count(): number {
    return this.#matrix?.study.ensemble.replicas ?? 0;
  }

  /** Another matrix: its replicas are other ones. */
  show(matrix: KnownMatrix | null, folder: string): void {
    this.stop();
    const cells = matrix?.tally.events.length ?? 1;
    this.#cache = new ReplicaCache(cells, Math.max(2, Math.floor(KEPT_BYTES / (8 * cells))));
    this.#matrix = matrix;
    this.#folder = folder;
    this.#came += 1;
    this.at = Math.min(this.at, Math.max(0, this.count - 1));
  }

  go(at: number): void {
    const count = Math.max(1, this.count);
    this.at = ((at % count) + count) % count;
    void this.#fetch();
  }

  toggle(): void {
    if (this.playing) return this.stop();
    this.playing = true;
    this.go(this.at);
    this.#tick();
  }

  stop(): void {
    this.playing = false;
    clearTimeout(this.#timer);
  }

  #tick(): void {
    const calm = matchMedia('(prefers-reduced-motion: reduce)').matches;
    const step = () => {
      if (!this.playing) return;
      // A replica still on its way is waited for, not skipped.
      if (this.values) this.go(this.at + 1);
      this.#tick();
    };
    this.#timer = setTimeout(step, 1000 / (calm ? RATE.calm : RATE.usual));
  }

  async #fetch(): Promise<void> {
    const matrix = this.#matrix;
    const cache = this.#cache;
    if (!matrix) return;
    const some = this.playing ? Math.max(1, Math.min(MOST_A_CALL, Math.floor(CALL_BYTES / (8 * cache.cells)))) : 1;
    // Half a call ahead is enough not to wait; a call of one replica each would be slow.
    const ahead = this.at + Math.floor(some / 2);
    if (cache.knows(this.at) && (ahead >= this.count || cache.knows(ahead))) return;
    const indices = cache.ask(this.at, Math.min(this.count, this.at + some));
    if (indices.length === 0) return;
    const answer = await this.bridge.call('replicas', { study: matrix.study, folder: this.#folder, indices });
    if (this.#cache !== cache) return;
    this.refusal = answer.ok ? null : answer;
    if (answer.ok) cache.keep(answer.value.indices, answer.value.values);
    else indices.forEach((index) => cache.forget(index));
    if (!answer.ok) this.stop();
    this.#came += 1;
  }
}
