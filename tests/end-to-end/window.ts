import { spawn, type ChildProcess } from 'node:child_process';
import { existsSync, mkdtempSync, rmSync } from 'node:fs';
import { tmpdir } from 'node:os';
import { join, resolve } from 'node:path';
import { chromium, type Browser, type Page } from 'playwright-core';

/** Where Debian and this project's continuous integration have it; any Chromium-family browser will do. */
const CHROMIUM = process.env['ENTASIS_BROWSER'] ?? '/usr/bin/chromium';
const FLAGS = [
  '--no-sandbox',
  '--disable-gpu',
  '--disable-quic',
  '--no-first-run',
  '--disable-background-networking',
  '--disable-component-update',
  '--disable-sync',
];

/** What takes longer than this has failed: a test should say so soon. */
const PATIENCE_MS = 15_000;

/** The built program, served over the loopback and opened in a real browser. */
export interface OpenWindow {
  page: Page;
  /** What the browser's console called an error, and every exception of the page. */
  faults: string[];
  close(): Promise<void>;
}

export interface WindowOptions {
  study?: string;
  /** Folder the program is started in: where its file chooser begins. */
  folder: string;
  width?: number;
  height?: number;
  dark?: boolean;
}

/** Starts `entasis serve` as a user does, and opens its one-time address. */
export async function openWindow(options: WindowOptions): Promise<OpenWindow> {
  const state = mkdtempSync(join(tmpdir(), 'entasis-state-'));
  const server = startServer(options, state);
  let browser: Browser | null = null;
  const close = async (): Promise<void> => {
    await browser?.close();
    server.kill('SIGINT');
    rmSync(state, { recursive: true, force: true, maxRetries: 5, retryDelay: 100 });
  };
  try {
    const url = await addressOf(server);
    browser = await chromium.launch({ executablePath: CHROMIUM, args: FLAGS });
    const { width = 1280, height = 800, dark = false } = options;
    const context = await browser.newContext({ viewport: { width, height }, colorScheme: dark ? 'dark' : 'light' });
    const page = await context.newPage();
    page.setDefaultTimeout(PATIENCE_MS);
    const faults: string[] = [];
    page.on('console', (message) => {
      if (message.type() === 'error') faults.push(message.text());
    });
    page.on('pageerror', (error) => faults.push(String(error)));
    await page.goto(url);
    return { page, faults, close };
  } catch (error) {
    await close();
    throw error;
  }
}

function startServer({ study, folder }: WindowOptions, state: string): ChildProcess {
  const command = resolve('out/main/command.js');
  if (!existsSync(command)) throw new Error('the program is not built: run `npm run build` first');
  const args = [command, 'serve', '--json', ...(study === undefined ? [] : [study])];
  const env = { ...process.env, XDG_STATE_HOME: state };
  return spawn(process.execPath, args, { cwd: folder, env, stdio: ['ignore', 'pipe', 'inherit'] });
}

/** The address that the server prints; rejects where it ends without one. */
function addressOf(server: ChildProcess): Promise<string> {
  return new Promise((found, reject) => {
    let printed = '';
    server.stdout!.on('data', (part: Buffer) => {
      printed += part.toString();
      if (printed.includes('\n')) found((JSON.parse(printed) as { url: string }).url);
    });
    server.once('exit', (status) => reject(new Error(`entasis serve ended with status ${status}`)));
  });
}
