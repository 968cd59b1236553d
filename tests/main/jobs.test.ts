import { describe, expect, it } from 'vitest';
import type { Progress } from '../../main/bridge';
import { Jobs, toldProgress } from '../../main/session/jobs';
import { Latest } from '../../main/session/latest';
import { Cancelled } from '../../src/study/input-error';

function clocked() {
  const told: Progress[] = [];
  const clock = { now: 0 };
  return {
    told,
    clock,
    jobs: new Jobs(
      (progress) => told.push(progress),
      () => clock.now,
    ),
  };
}

describe('a job', () => {
  it('tells how far it is at most ten times a second, and always its end', async () => {
    const { told, clock, jobs } = clocked();
    await jobs.run('read', async ({ progress }) => {
      for (let done = 0; done <= 1000; done++) {
        progress({ stage: 'reading', done, total: 1000, unit: 'bytes', rows: done });
        clock.now += 1;
      }
    });
    expect(told).toHaveLength(11);
    expect(told.at(-1)).toMatchObject({ job: 'read', done: 1000, total: 1000, rows: 1000, secondsLeft: 0 });
  });

  it('gives rate and time left once enough time has passed, at 300 ms and not at 299', () => {
    const progress = { stage: 'drawing' as const, done: 300, total: 1000, unit: 'replicas' as const };
    expect(toldProgress('a', progress, 299)).toMatchObject({ rate: null, secondsLeft: null, rows: null });
    expect(toldProgress('a', progress, 300)).toMatchObject({ rate: 1000, secondsLeft: 0.7 });
  });

  it('begins its rate anew with each stage', async () => {
    const { told, clock, jobs } = clocked();
    await jobs.run('build', async ({ progress }) => {
      progress({ stage: 'reading', done: 0, total: 10, unit: 'bytes' });
      clock.now = 10_000;
      progress({ stage: 'drawing', done: 0, total: 10, unit: 'replicas' });
      clock.now = 11_000;
      progress({ stage: 'drawing', done: 5, total: 10, unit: 'replicas' });
    });
    expect(told.at(-1)).toMatchObject({ rate: 5, secondsLeft: 1 });
  });

  it('ends as cancelled when it is cancelled, whatever error its work ends with', async () => {
    const { jobs } = clocked();
    const running = jobs.run('long', async ({ signal }) => {
      await new Promise((resolve) => signal.addEventListener('abort', resolve));
      throw new Error('a worker ended before its work was done');
    });
    expect(jobs.cancel('long')).toBe(true);
    await expect(running).rejects.toBeInstanceOf(Cancelled);
    expect(jobs.cancel('long')).toBe(false);
  });

  it('keeps its own errors when it is not cancelled, and leaves its name free', async () => {
    const { jobs } = clocked();
    const fail = () => jobs.run('a', () => Promise.reject(new Error('disk')));
    await expect(fail()).rejects.toThrow('disk');
    await expect(fail()).rejects.toThrow('disk');
  });

  it('has a name of its own while it runs', async () => {
    const { jobs } = clocked();
    const first = jobs.run('a', ({ signal }) => new Promise((resolve) => signal.addEventListener('abort', resolve)));
    await expect(jobs.run('a', () => Promise.resolve(1))).rejects.toThrow('runs already');
    jobs.cancelAll();
    await first;
  });
});

describe('the latest of many calls', () => {
  it('is run, those it overtook are refused, and the one that runs is left to end', async () => {
    const latest = new Latest();
    const ends: (() => void)[] = [];
    const ran: number[] = [];
    const call = (n: number) =>
      latest.run(() => {
        ran.push(n);
        return new Promise<number>((resolve) => ends.push(() => resolve(n)));
      });
    const calls = [1, 2, 3, 4].map((n) => call(n).catch((error: { code: string }) => error.code));
    ends.shift()!();
    expect(await calls[0]).toBe(1);
    await Promise.resolve();
    ends.shift()!();
    expect(await Promise.all(calls)).toStrictEqual([1, 'overtaken', 'overtaken', 4]);
    expect(ran).toStrictEqual([1, 4]);
  });

  it('runs after one that failed', async () => {
    const latest = new Latest();
    const failing = latest.run(() => Promise.reject(new Error('x')));
    const next = latest.run(() => Promise.resolve(2));
    await expect(failing).rejects.toThrow('x');
    expect(await next).toBe(2);
    expect(await latest.run(() => Promise.resolve(3))).toBe(3);
  });
});
