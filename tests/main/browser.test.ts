import { chmodSync, existsSync, mkdtempSync, readFileSync, rmSync, writeFileSync } from 'node:fs';
import { tmpdir } from 'node:os';
import { join } from 'node:path';
import { afterEach, beforeEach, describe, expect, it } from 'vitest';
import { browserArguments, findBrowser, openInBrowser } from '../../main/browser';

let folder: string;
beforeEach(() => (folder = mkdtempSync(join(tmpdir(), 'entasis-browser-'))));
afterEach(() => rmSync(folder, { recursive: true, force: true }));

const system = (platform: NodeJS.Platform, env: NodeJS.ProcessEnv, there: string[]) => ({
  platform,
  env,
  canRun: (path: string) => there.includes(path),
});

describe('a Chromium-family browser', () => {
  it('is looked for along the path, the plainest name first', () => {
    const there = ['/opt/bin/microsoft-edge', '/usr/bin/google-chrome'];
    expect(findBrowser(system('linux', { PATH: '/opt/bin:/usr/bin' }, there))).toBe('/usr/bin/google-chrome');
    expect(findBrowser(system('linux', { PATH: '/opt/bin' }, there))).toBe('/opt/bin/microsoft-edge');
    expect(findBrowser(system('linux', { PATH: '/none' }, there))).toBeNull();
  });

  it('is looked for among the applications of a Mac', () => {
    const chrome = '/Applications/Google Chrome.app/Contents/MacOS/Google Chrome';
    expect(findBrowser(system('darwin', { HOME: '/Users/a' }, [chrome]))).toBe(chrome);
  });

  it('is the one that the user names, before all others', () => {
    expect(findBrowser(system('linux', { ENTASIS_BROWSER: '/my/own', PATH: '/usr/bin' }, ['/usr/bin/chromium']))).toBe(
      '/my/own',
    );
  });

  it('runs with a profile of its own, and without a sandbox only for root', () => {
    expect(browserArguments('http://x', '/p', false).join(' ')).toMatch(/--app=http:\/\/x .*--user-data-dir=\/p/);
    expect(browserArguments('http://x', '/p', false)).not.toContain('--no-sandbox');
    expect(browserArguments('http://x', '/p', true)).toContain('--no-sandbox');
  });
});

describe('its window', () => {
  const script = (text: string): string => {
    const path = join(folder, 'browser');
    writeFileSync(path, `#!/bin/sh\n${text}\n`);
    chmodSync(path, 0o755);
    return path;
  };

  it('is waited for until it is closed, and its profile is cleared away', async () => {
    const browser = script(`for a in "$@"; do echo "$a" >> "${folder}/arguments"; done`);
    await openInBrowser(browser, 'http://127.0.0.1:1/?key=k');
    const args = readFileSync(join(folder, 'arguments'), 'utf8').split('\n');
    expect(args[0]).toBe('--app=http://127.0.0.1:1/?key=k');
    const profile = args.find((arg) => arg.startsWith('--user-data-dir='))!.slice('--user-data-dir='.length);
    expect(existsSync(profile)).toBe(false);
  });

  it('that cannot be opened is told with what to do instead', async () => {
    await expect(openInBrowser(script('exit 3'), 'http://x')).rejects.toThrow('entasis serve');
    await expect(openInBrowser(join(folder, 'none'), 'http://x')).rejects.toThrow('entasis serve');
  });

  it('is closed by the signal', async () => {
    const stop = new AbortController();
    const closed = openInBrowser(script('exec sleep 60'), 'http://x', stop.signal);
    setTimeout(() => stop.abort(), 100);
    await closed;
  });
});
