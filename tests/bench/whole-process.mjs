import { spawn } from 'node:child_process';
import { readFileSync } from 'node:fs';

/** Runs a command as a whole process: wall seconds, and peak resident memory in MB where /proc tells it. */
export function wholeProcess(command, args) {
  return new Promise((resolve, reject) => {
    const started = performance.now();
    const child = spawn(command, args, { stdio: ['ignore', 'pipe', 'pipe'] });
    let output = '';
    let errors = '';
    let peak = 0;
    const look = () => {
      try {
        const kilobytes = /VmHWM:\s+(\d+)/.exec(readFileSync(`/proc/${child.pid}/status`, 'utf8'))?.[1];
        peak = Math.max(peak, Number(kilobytes ?? 0) / 1024);
      } catch {
        // Ended, or a system without /proc.
      }
    };
    const timer = setInterval(look, 20);
    child.stdout.on('data', (data) => (output += data));
    child.stderr.on('data', (data) => (errors += data));
    child.on('close', (status) => {
      clearInterval(timer);
      const seconds = (performance.now() - started) / 1000;
      if (status === 0) resolve({ seconds, peak, output });
      else reject(new Error(`${command} ${args.join(' ')} ended with ${status}: ${errors}`));
    });
  });
}

/** Two commands in turn, `runs` times, after one run of each that does not count: the medians and their ratio. */
export async function inTurn(ours, theirs, runs) {
  const seconds = { ours: [], theirs: [] };
  const peak = { ours: 0, theirs: 0 };
  for (let run = -1; run < runs; run++) {
    for (const [who, { command, args, before }] of Object.entries({ ours, theirs })) {
      before?.();
      const result = await wholeProcess(command, args);
      if (run >= 0) seconds[who].push(result.seconds);
      peak[who] = Math.max(peak[who], result.peak);
    }
  }
  const [a, b] = [median(seconds.ours), median(seconds.theirs)];
  return { ours: a, theirs: b, ratio: b / a, peak };
}

export function median(values) {
  const sorted = [...values].sort((a, b) => a - b);
  return sorted[Math.floor(sorted.length / 2)];
}
