import { chmodSync, readFileSync, writeFileSync } from 'node:fs';
import { createServer, type Server } from 'node:http';
import type { AddressInfo } from 'node:net';
import type { ChildProcess } from 'node:child_process';
import { afterAll, afterEach, describe, expect, it } from 'vitest';
import { entasis, ownFolder, startEntasis, type Run } from './entasis';

const folder = ownFolder();
let running: ChildProcess | null = null;
afterEach(() => running?.kill('SIGKILL'));
afterAll(() => folder.remove());

/** First line that a started command prints. */
function firstLine(child: ChildProcess): Promise<string> {
  return new Promise((found, reject) => {
    let printed = '';
    child.stdout!.on('data', (part: Buffer) => {
      printed += part.toString();
      if (printed.includes('\n')) found(printed.split('\n')[0]!);
    });
    child.once('exit', () => reject(new Error('it ended without a word')));
  });
}

const ended = (child: ChildProcess) => new Promise<number | null>((resolve) => child.once('exit', resolve));

describe('entasis serve', () => {
  it('prints a one-time address that opens the window, and ends with Ctrl-C', async () => {
    running = startEntasis('serve', '--json');
    const { url } = JSON.parse(await firstLine(running)) as { url: string };
    expect(new URL(url).hostname).toBe('127.0.0.1');
    const first = await fetch(url);
    expect(first.status).toBe(200);
    expect(await first.text()).toContain('<title>Entasis</title>');
    expect((await fetch(url)).status).toBe(403);
    const end = ended(running);
    running.kill('SIGINT');
    expect(await end).toBe(0);
  });

  it('says in words how to come to it from another machine', async () => {
    running = startEntasis('serve');
    expect(await firstLine(running)).toMatch(/^window: http:\/\/127\.0\.0\.1:\d+\/\?key=[\w-]{43}$/);
  });

  it('ends with one line where its port is taken or its study is none', async () => {
    const taken = createServer();
    await new Promise<void>((resolve) => taken.listen(0, '127.0.0.1', resolve));
    const { port } = (taken as Server).address() as AddressInfo;
    const runs: Run[] = [
      await entasis('serve', '--port', String(port)),
      await entasis('serve', folder.path('none.study.json')),
      await entasis('serve', '--port', '70000'),
    ];
    taken.close();
    for (const { status, err, out } of runs) {
      expect(status).toBe(2);
      expect(err).toMatch(/^entasis: [^\n]+\n$/);
      expect(out).toBe('');
    }
    expect(runs[0]!.err).toContain('is taken');
  });
});

describe('entasis open', () => {
  it('opens the window in a browser of its own and ends when that is closed', async () => {
    const browser = folder.path('browser');
    writeFileSync(browser, `#!/bin/sh\necho "$1" > "${folder.path('address')}"\n`);
    chmodSync(browser, 0o755);
    process.env['ENTASIS_BROWSER'] = browser;
    try {
      const { status, err } = await entasis('open');
      expect([status, err]).toStrictEqual([0, '']);
      expect(readFileSync(folder.path('address'), 'utf8')).toMatch(/^--app=http:\/\/127\.0\.0\.1:\d+\/\?key=/);
    } finally {
      delete process.env['ENTASIS_BROWSER'];
    }
  });

  it('says what to do where no browser is here', async () => {
    const path = process.env['PATH'];
    process.env['PATH'] = folder.path('nowhere');
    try {
      const { status, err } = await entasis('open');
      expect(status).toBe(2);
      expect(err).toContain('use entasis serve');
    } finally {
      process.env['PATH'] = path;
    }
  });
});
