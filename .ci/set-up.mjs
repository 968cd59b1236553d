// Installs the packages of the lock file where they are missing or older than it, so that every README command
// works on a fresh clone with Node and npm alone.
import { execFileSync } from 'node:child_process';
import { existsSync, statSync } from 'node:fs';

const lock = 'package-lock.json';
const installed = 'node_modules/.package-lock.json';
if (!existsSync(installed) || statSync(installed).mtimeMs < statSync(lock).mtimeMs) {
  console.error('Installing the packages of package-lock.json ...');
  execFileSync('npm', ['ci', '--no-audit', '--no-fund', '--loglevel=error'], {
    stdio: ['ignore', 2, 2],
    shell: process.platform === 'win32',
  });
}
