import { spawn } from 'node:child_process';
import { existsSync, mkdtempSync, rmSync, statSync } from 'node:fs';
import { tmpdir } from 'node:os';
import { join } from 'node:path';
import { pathToFileURL } from 'node:url';
import { InputError, stopIfCancelled } from '../src/study/input-error';
import { findBrowser } from './browser';

/** A page takes seconds; a browser that hangs is not waited for longer. */
const LONGEST_MS = 120_000;

/**
 * Prints an HTML file as PDF by a Chromium-family browser of this machine, without a window and with a profile of its
 * own. Throws `InputError` where there is none or it does not print.
 */
export async function printPdf(html: string, pdf: string, signal?: AbortSignal): Promise<void> {
  const browser = findBrowser();
  if (browser === null) {
    throw new InputError('--pdf', 'no Chromium-family browser is here to print it', REMEDY);
  }
  const profile = mkdtempSync(join(tmpdir(), 'entasis-print-'));
  try {
    const status = await run(browser, printArguments(html, pdf, profile, process.getuid?.() === 0), signal);
    stopIfCancelled(signal);
    const isPrinted = existsSync(pdf) && statSync(pdf).size > 0;
    if (status !== 0 || !isPrinted) throw cannotPrint(browser, `it ended with status ${status}`);
  } finally {
    // The browser's children may still write for a moment.
    rmSync(profile, { recursive: true, force: true, maxRetries: 5, retryDelay: 100 });
  }
}

const REMEDY = 'install one, name it in ENTASIS_BROWSER, or print the HTML report from any browser';

/** The report runs no script and refers to nothing outside: the browser needs neither network nor extensions. */
export function printArguments(html: string, pdf: string, profile: string, isRoot: boolean): string[] {
  return [
    '--headless',
    `--print-to-pdf=${pdf}`,
    '--no-pdf-header-footer',
    `--user-data-dir=${profile}`,
    '--disable-gpu',
    '--disable-quic',
    '--no-first-run',
    '--no-default-browser-check',
    '--disable-background-networking',
    '--disable-component-update',
    '--disable-extensions',
    '--disable-sync',
    // Chromium refuses to run sandboxed as root.
    ...(isRoot ? ['--no-sandbox'] : []),
    ...(process.env['ENTASIS_BROWSER_ARGUMENTS'] ?? '').split(' ').filter((argument) => argument !== ''),
    pathToFileURL(html).href,
  ];
}

function run(browser: string, args: string[], signal: AbortSignal | undefined): Promise<number | null> {
  return new Promise((resolve, reject) => {
    const child = spawn(browser, args, { stdio: 'ignore', timeout: LONGEST_MS });
    const stop = (): void => void child.kill();
    signal?.addEventListener('abort', stop, { once: true });
    child.once('error', (cause) => reject(cannotPrint(browser, cause.message, cause)));
    child.once('exit', (status) => {
      signal?.removeEventListener('abort', stop);
      resolve(status);
    });
  });
}

function cannotPrint(browser: string, what: string, cause?: Error): InputError {
  return new InputError(browser, `the report could not be printed: ${what}`, REMEDY, cause ? { cause } : undefined);
}
