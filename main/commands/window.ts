import { spawn } from 'node:child_process';
import { existsSync, readFileSync } from 'node:fs';
import { createRequire } from 'node:module';
import { dirname, join, resolve } from 'node:path';
import { fileURLToPath } from 'node:url';
import { InputError } from '../../src/study/input-error';
import { findBrowser, openInBrowser } from '../browser';
import { startLoopback, type Loopback } from '../loopback';
import { Session } from '../session';
import { readStudyFile } from '../study-file';
import type { Surroundings } from '../surroundings';
import { windowFilesBeside } from '../window-files';

/** `entasis open [STUDY]`: the desktop's window, else a browser's over the loopback, until it is closed. */
export async function open(study: string | undefined, around: Surroundings): Promise<void> {
  if (study !== undefined) readStudyFile(study);
  const electron = findElectron(around);
  if (electron !== null) return openDesktop(electron, study, around);
  const browser = findBrowser();
  if (browser === null) {
    const remedy = 'install one, fetch Electron with "npx install-electron", or use entasis serve';
    throw new InputError('open', 'neither Electron nor a Chromium-family browser is here', remedy);
  }
  await withLoopback(study, 0, around, ({ url }) => openInBrowser(browser, url, around.signal));
}

/** `entasis serve [STUDY] [--port N] [--json]`: the window over the loopback, until Ctrl-C. */
export async function serve(
  study: string | undefined,
  flags: { port?: number; json?: boolean },
  around: Surroundings,
): Promise<void> {
  if (study !== undefined) readStudyFile(study);
  await withLoopback(study, flags.port ?? 0, around, async ({ url, port }) => {
    const text = flags.json ? JSON.stringify({ url, port }) : servedText(url, port);
    process.stdout.write(`${text}\n`);
    await aborted(around.signal);
  });
}

function servedText(url: string, port: number): string {
  return [
    `window: ${url}`,
    'The address is good once, for one browser on this machine. Ctrl-C ends it.',
    `From another machine: ssh -L ${port}:127.0.0.1:${port} THIS-HOST, then open the same address there.`,
  ].join('\n');
}

async function withLoopback(
  study: string | undefined,
  port: number,
  around: Surroundings,
  work: (loopback: Loopback) => Promise<void>,
): Promise<void> {
  const { workerFiles, renderer, demonstration } = windowFilesBeside(around.readWorker);
  const session = new Session({ transport: 'loopback', workerFiles, demonstration, open: study ?? null });
  try {
    const loopback = await bound(session, renderer, port);
    try {
      await work(loopback);
    } finally {
      await loopback.close();
    }
  } finally {
    await session.close();
  }
}

async function bound(session: Session, renderer: string, port: number): Promise<Loopback> {
  try {
    return await startLoopback(session, renderer, port);
  } catch (cause) {
    const { code, message } = cause as NodeJS.ErrnoException;
    if (code === 'ENOENT') throw new InputError(renderer, 'the window is not built', 'run npm run build', { cause });
    const what = code === 'EADDRINUSE' ? 'is taken' : `cannot be used (${code ?? message})`;
    throw new InputError(`--port ${port}`, what, 'choose another port, or leave it out', { cause });
  }
}

function aborted(signal: AbortSignal): Promise<void> {
  return new Promise((resolve) => {
    if (signal.aborted) resolve();
    else signal.addEventListener('abort', () => resolve(), { once: true });
  });
}

/**
 * Electron's binary, where the package has one. Its own entry is not asked, because that fetches one unasked.
 */
function findElectron({ readWorker }: Surroundings): string | null {
  try {
    const folder = dirname(createRequire(readWorker).resolve('electron/package.json'));
    const name = readFileSync(join(folder, 'path.txt'), 'utf8').trim();
    const binary = join(process.env['ELECTRON_OVERRIDE_DIST_PATH'] ?? join(folder, 'dist'), name);
    return existsSync(binary) ? binary : null;
  } catch {
    return null;
  }
}

function openDesktop(electron: string, study: string | undefined, { readWorker, signal }: Surroundings): Promise<void> {
  const desktop = fileURLToPath(new URL('./desktop.js', readWorker));
  return new Promise((done, reject) => {
    const args = [desktop, ...(study === undefined ? [] : [resolve(study)])];
    const child = spawn(electron, args, { stdio: 'inherit' });
    const stop = (): void => void child.kill();
    signal.addEventListener('abort', stop, { once: true });
    child.once('error', reject);
    child.once('exit', () => {
      signal.removeEventListener('abort', stop);
      done();
    });
  });
}
