import { statSync } from 'node:fs';
import { InputError } from '../../src/study/input-error';
import { verifyHandover } from '../convert';
import type { Surroundings } from '../surroundings';
import { ProgressLine } from '../progress-line';
import { verifyBundle } from '../verify';

/**
 * `entasis verify BUNDLE`, or a file that `convert` wrote (`--against BUNDLE` compares its content too): prints what was
 * checked. Returns whether all of it holds.
 */
export async function verify(
  bundle: string,
  flags: { workers: number; against?: string; json?: boolean },
  around: Surroundings,
): Promise<boolean> {
  const line = new ProgressLine();
  const onProgress = line.show.bind(line);
  const isFile = statSync(bundle, { throwIfNoEntry: false })?.isFile();
  if (flags.against !== undefined && !isFile) {
    throw new InputError(bundle, 'is no file that convert wrote', 'leave --against out to verify a bundle');
  }
  const verification = isFile
    ? await verifyHandover(bundle, { bundle: flags.against, signal: around.signal, onProgress })
    : await verifyBundle(bundle, { ...around, workers: flags.workers, onProgress });
  line.clear();
  const { holds, checks } = verification;
  const lines = checks.map((check) => `${check.holds ? 'holds' : 'FAILS'}: ${check.what} (${check.detail})`);
  const text = flags.json
    ? JSON.stringify({ bundle, ...verification })
    : [...lines, holds ? 'verified' : 'not verified'].join('\n');
  process.stdout.write(`${text}\n`);
  return holds;
}
