import { execFile, spawn, type ChildProcess } from 'node:child_process';
import { existsSync, mkdtempSync, rmSync } from 'node:fs';
import { tmpdir } from 'node:os';
import { join, resolve } from 'node:path';

/** The built command line: tests drive it as a user would, as a process. */
const COMMAND = resolve('out/main/command.js');

export interface Run {
  status: number;
  out: string;
  err: string;
}

/** Runs `entasis ...` to its end. */
export function entasis(...args: string[]): Promise<Run> {
  requireBuilt();
  return new Promise((done) => {
    execFile(process.execPath, [COMMAND, ...args], { maxBuffer: 64 << 20 }, (error, out, err) => {
      done({ status: error ? Number(error.code) : 0, out, err });
    });
  });
}

/** Starts `entasis ...` and hands over the process. */
export function startEntasis(...args: string[]): ChildProcess {
  requireBuilt();
  return spawn(process.execPath, [COMMAND, ...args], { stdio: ['ignore', 'pipe', 'pipe'] });
}

function requireBuilt(): void {
  if (!existsSync(COMMAND)) throw new Error('the command line is not built: run `npm run build` first');
}

/** A folder of its own for one test file. */
export function ownFolder(): { path: (name: string) => string; remove: () => void } {
  const folder = mkdtempSync(join(tmpdir(), 'entasis-test-'));
  return { path: (name) => join(folder, name), remove: () => rmSync(folder, { recursive: true, force: true }) };
}
