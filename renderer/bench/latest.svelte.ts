import { untrack } from 'svelte';
import type { Answer, Argument, CallName, Refusal, Result } from '../../main/bridge';

/**
 * The newest answer to a question that is asked again and again while the study changes. At most one call is under
 * way; of the questions that come meanwhile only the last is asked, so that a drag never piles up work.
 */
export class Latest<Name extends CallName, Question = Argument<Name>> {
  value = $state.raw<Result<Name> | null>(null);
  refusal = $state.raw<Refusal | null>(null);
  /** What the value (or the refusal) answers. */
  key = $state('');
  waiting = $state(false);
  #next: { key: string; argument: Question } | null = null;
  #asked = '';

  constructor(readonly call: (argument: Question) => Promise<Answer<Result<Name>>>) {}

  /** Asks unless `key` is answered or being answered. */
  ask(key: string, argument: Question): void {
    if (key === this.#asked) return;
    this.#asked = key;
    this.#next = { key, argument };
    // Effects ask; what asking reads and writes must not make them run again.
    if (!untrack(() => this.waiting)) untrack(() => void this.#work());
  }

  /** Forgets the value and every question. */
  forget(): void {
    this.#asked = this.key = '';
    this.#next = this.value = this.refusal = null;
  }

  /** Whether the value answers `key`. */
  answers(key: string): boolean {
    return this.key === key && this.value !== null && this.refusal === null;
  }

  async #work(): Promise<void> {
    this.waiting = true;
    while (this.#next) {
      const { key, argument } = this.#next;
      this.#next = null;
      const answer = await this.call(argument);
      if (this.#asked === '' || (!answer.ok && answer.code === 'overtaken')) continue;
      this.#take(key, answer);
    }
    this.waiting = false;
  }

  #take(key: string, answer: Answer<Result<Name>>): void {
    this.key = key;
    this.refusal = answer.ok ? null : answer;
    if (answer.ok) this.value = answer.value;
    // A cancelled question may be asked again.
    if (!answer.ok && this.#asked === key) this.#asked = '';
  }
}
