import { existsSync, readFileSync } from 'node:fs';
import { createRequire } from 'node:module';
import { globSync } from 'tinyglobby';
import { describe, expect, it } from 'vitest';
import configuration from '../../electron-builder';

const require = createRequire(import.meta.url);

interface Builder {
  validateConfiguration(configuration: unknown, log: unknown): Promise<void>;
}
/** The packager's own check of a configuration against its schema (app-builder-lib). */
const { validateConfiguration } = require('app-builder-lib/out/util/config/config.js') as Builder;
const { DebugLogger } = require('builder-util') as { DebugLogger: new (enabled: boolean) => unknown };
const validate = (value: unknown) => validateConfiguration(value, new DebugLogger(false));

describe('the packaging of the desktop program', () => {
  it('follows the schema of electron-builder', async () => {
    await expect(validate(configuration)).resolves.toBeUndefined();
  });

  it('would be refused with a setting that the schema does not know', async () => {
    await expect(validate({ ...configuration, electronFuse: {} })).rejects.toThrow('electronFuse');
    const fuses = { ...configuration.electronFuses, runAsNode: 'no' };
    await expect(validate({ ...configuration, electronFuses: fuses })).rejects.toThrow('runAsNode');
  });

  it('is made for Linux, Windows and macOS', () => {
    for (const system of ['linux', 'win', 'mac'] as const) expect(configuration[system].target).toHaveLength(2);
  });

  it('sets every fuse so that the program cannot be run as plain Node or fed another archive', () => {
    expect(configuration.electronFuses).toMatchObject({
      runAsNode: false,
      enableNodeOptionsEnvironmentVariable: false,
      enableNodeCliInspectArguments: false,
      enableEmbeddedAsarIntegrityValidation: true,
      onlyLoadAppFromAsar: true,
      grantFileProtocolExtraPrivileges: false,
    });
  });

  it('carries the built program, its demonstration and its native parts where they can be read', () => {
    const { main } = JSON.parse(readFileSync('package.json', 'utf8')) as { main: string };
    expect(main).toBe('out/main/desktop.js');
    expect(configuration.files).toContain('out/**');
    const unpacked = globSync(configuration.asarUnpack, { dot: true });
    expect(unpacked.some((path) => path.endsWith('.node'))).toBe(true);
    expect(unpacked.some((path) => path.endsWith('gallery.study.json'))).toBe(true);
    expect(existsSync(`${configuration.directories.buildResources}/icon.png`)).toBe(true);
  });
});
