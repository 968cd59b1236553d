import { spawn } from 'node:child_process';
import { accessSync, constants, mkdtempSync, rmSync } from 'node:fs';
import { tmpdir } from 'node:os';
import { delimiter, join } from 'node:path';
import { InputError } from '../src/study/input-error';

/** Chromium-family browsers by the names each system knows them under. */
const LINUX = [
  'chromium',
  'chromium-browser',
  'google-chrome-stable',
  'google-chrome',
  'microsoft-edge-stable',
  'microsoft-edge',
  'brave-browser',
  'vivaldi',
];
const MAC = ['Google Chrome', 'Chromium', 'Microsoft Edge', 'Brave Browser', 'Vivaldi'];
const WINDOWS = [
  ['Google', 'Chrome', 'Application', 'chrome.exe'],
  ['Microsoft', 'Edge', 'Application', 'msedge.exe'],
  ['Chromium', 'Application', 'chrome.exe'],
  ['BraveSoftware', 'Brave-Browser', 'Application', 'brave.exe'],
];

interface System {
  platform: NodeJS.Platform;
  env: NodeJS.ProcessEnv;
  canRun: (path: string) => boolean;
}
const THIS_SYSTEM: System = { platform: process.platform, env: process.env, canRun };

/** A Chromium-family browser of this machine, `ENTASIS_BROWSER` before all others; `null` where there is none. */
export function findBrowser(system: System = THIS_SYSTEM): string | null {
  const { env, canRun } = system;
  const own = env['ENTASIS_BROWSER'];
  if (own !== undefined && own !== '') return own;
  return candidates(system).find(canRun) ?? null;
}

function candidates({ platform, env }: System): string[] {
  if (platform === 'darwin') {
    const homes = ['/Applications', join(env['HOME'] ?? '', 'Applications')];
    return homes.flatMap((home) => MAC.map((name) => join(home, `${name}.app`, 'Contents', 'MacOS', name)));
  }
  if (platform === 'win32') {
    const homes = [env['PROGRAMFILES'], env['PROGRAMFILES(X86)'], env['LOCALAPPDATA']].filter(
      (home) => home !== undefined,
    );
    return homes.flatMap((home) => WINDOWS.map((parts) => join(home, ...parts)));
  }
  const folders = (env['PATH'] ?? '').split(delimiter).filter((folder) => folder !== '');
  return LINUX.flatMap((name) => folders.map((folder) => join(folder, name)));
}

function canRun(path: string): boolean {
  try {
    accessSync(path, constants.X_OK);
    return true;
  } catch {
    return false;
  }
}

/** Arguments for a window of its own, without tabs, address bar, or a profile of the user. */
export function browserArguments(url: string, profile: string, isRoot: boolean): string[] {
  return [
    `--app=${url}`,
    `--user-data-dir=${profile}`,
    '--window-size=1440,900',
    '--no-first-run',
    '--no-default-browser-check',
    '--password-store=basic',
    '--disable-background-networking',
    '--disable-component-update',
    '--disable-extensions',
    '--disable-sync',
    // Chromium refuses to run sandboxed as root; `test-type` takes away its banner about it.
    ...(isRoot ? ['--no-sandbox', '--test-type'] : []),
    ...(process.env['ENTASIS_BROWSER_ARGUMENTS'] ?? '').split(' ').filter((argument) => argument !== ''),
  ];
}

/**
 * Opens `url` in a window of its own and resolves when that window is closed. The one-time key stands among the
 * browser's arguments, which others on this machine may see: it is good once, and the window that comes second is refused.
 * Throws `InputError` where the browser cannot open a window.
 */
export async function openInBrowser(browser: string, url: string, signal?: AbortSignal): Promise<void> {
  const profile = mkdtempSync(join(tmpdir(), 'entasis-window-'));
  try {
    const status = await run(browser, browserArguments(url, profile, process.getuid?.() === 0), signal);
    if (status !== 0 && !signal?.aborted) throw cannotOpen(browser, `it ended with status ${status}`);
  } finally {
    // The browser's children may still write for a moment.
    rmSync(profile, { recursive: true, force: true, maxRetries: 5, retryDelay: 100 });
  }
}

function run(browser: string, args: string[], signal: AbortSignal | undefined): Promise<number | null> {
  return new Promise((resolve, reject) => {
    const child = spawn(browser, args, { stdio: 'ignore' });
    const stop = (): void => void child.kill();
    signal?.addEventListener('abort', stop, { once: true });
    child.once('error', (cause) => reject(cannotOpen(browser, cause.message, cause)));
    child.once('exit', (status) => {
      signal?.removeEventListener('abort', stop);
      resolve(status);
    });
  });
}

function cannotOpen(browser: string, what: string, cause?: Error): InputError {
  const remedy = 'use entasis serve and open its address yourself';
  return new InputError(browser, `no window could be opened: ${what}`, remedy, cause ? { cause } : undefined);
}
