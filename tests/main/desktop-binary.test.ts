import { existsSync, mkdtempSync, readFileSync, rmSync } from 'node:fs';
import { createRequire } from 'node:module';
import { tmpdir } from 'node:os';
import { dirname, join, resolve } from 'node:path';
import { _electron } from 'playwright-core';
import { describe, expect, it } from 'vitest';

/** Electron's binary, where the package has one; its own entry would fetch one unasked. */
function binaryOf(): string | null {
  const folder = dirname(createRequire(import.meta.url).resolve('electron/package.json'));
  const name = join(folder, 'path.txt');
  const binary = existsSync(name) ? join(folder, 'dist', readFileSync(name, 'utf8').trim()) : null;
  return binary !== null && existsSync(binary) ? binary : null;
}

const binary = binaryOf();

describe.skipIf(binary === null)('the desktop with its real binary', () => {
  it('opens a sandboxed page that knows the bridge and nothing of Node', async () => {
    const state = mkdtempSync(join(tmpdir(), 'entasis-electron-'));
    const args = [resolve('out/main/desktop.js'), ...(process.getuid?.() === 0 ? ['--no-sandbox'] : [])];
    const program = await _electron.launch({
      executablePath: binary!,
      args,
      env: { ...(process.env as Record<string, string>), XDG_STATE_HOME: state },
    });
    try {
      const page = await program.firstWindow();
      expect(page.url()).toBe('entasis://window/');
      const start = await page.evaluate(() => window.entasis!.call('start', {}));
      expect(start).toMatchObject({ ok: true, value: { transport: 'desktop' } });
      expect(await page.evaluate(() => typeof (globalThis as { require?: unknown }).require)).toBe('undefined');
      expect(await page.evaluate(() => typeof (globalThis as { process?: unknown }).process)).toBe('undefined');
      expect(await page.evaluate(() => fetch('file:///etc/hostname').then(String, () => 'refused'))).toBe('refused');
    } finally {
      await program.close();
      rmSync(state, { recursive: true, force: true });
    }
  });
});
