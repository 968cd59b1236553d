import { Refused } from './refusal';

/** Runs one piece of work at a time; of those that wait only the newest is run, the others are refused as overtaken. */
export class Latest {
  private running = false;
  private waiting: { start: () => void; drop: () => void } | null = null;

  async run<T>(work: () => Promise<T>): Promise<T> {
    if (this.running) await this.turn();
    this.running = true;
    try {
      return await work();
    } finally {
      const next = this.waiting;
      this.waiting = null;
      // The next one keeps the place: nothing may slip in between.
      if (next) next.start();
      else this.running = false;
    }
  }

  private turn(): Promise<void> {
    this.waiting?.drop();
    return new Promise((start, reject) => {
      const drop = (): void =>
        reject(new Refused('overtaken', 'call', 'a newer one took its place', 'use the newer answer'));
      this.waiting = { start, drop };
    });
  }
}
