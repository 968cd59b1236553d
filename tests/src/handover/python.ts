import { execFileSync, spawnSync } from 'node:child_process';

/** Debian's interpreter, the one that has the packages of `python3-numpy`, `python3-h5py`, `python3-astropy`. */
const PYTHON = process.env['ENTASIS_PYTHON'] ?? '/usr/bin/python3';

/** True where Python and all the named modules are present: what needs them is skipped elsewhere, and reported so. */
export function hasPython(...modules: string[]): boolean {
  return spawnSync(PYTHON, ['-c', modules.map((name) => `import ${name}`).join('\n')]).status === 0;
}

/** Runs a script with `sys.argv[1:] = args` and parses what it prints as JSON. */
export function python(script: string, ...args: string[]): unknown {
  const printed = execFileSync(PYTHON, ['-c', script, ...args], { encoding: 'utf8', maxBuffer: 2 ** 28 });
  return JSON.parse(printed);
}

/** Runs a script file and returns its standard output. */
export function runPython(path: string, ...args: string[]): string {
  return execFileSync(PYTHON, [path, ...args], { encoding: 'utf8' });
}
