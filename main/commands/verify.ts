import type { Surroundings } from '../surroundings';
import { ProgressLine } from '../progress-line';
import { verifyBundle } from '../verify';

/** `entasis verify BUNDLE`: prints what was checked. Returns whether all of it holds. */
export async function verify(
  bundle: string,
  flags: { workers: number; json?: boolean },
  around: Surroundings,
): Promise<boolean> {
  const line = new ProgressLine();
  const verification = await verifyBundle(bundle, {
    ...around,
    workers: flags.workers,
    onProgress: line.show.bind(line),
  });
  line.clear();
  const { holds, checks } = verification;
  const lines = checks.map((check) => `${check.holds ? 'holds' : 'FAILS'}: ${check.what} (${check.detail})`);
  const text = flags.json
    ? JSON.stringify({ bundle, ...verification })
    : [...lines, holds ? 'verified' : 'not verified'].join('\n');
  process.stdout.write(`${text}\n`);
  return holds;
}
