import { FORMAT_IDS } from '../../src/handover/formats';
import type { ReplicaRange } from '../../src/handover/handover-options';
import { InputError } from '../../src/study/input-error';
import { convertBundle } from '../convert';
import { ProgressLine } from '../progress-line';
import type { Surroundings } from '../surroundings';

/** `entasis convert BUNDLE --to FORMAT --out FILE`: prints each file written, its bytes and SHA-256. */
export async function convert(
  bundle: string,
  flags: { to: string; out: string; replicas?: ReplicaRange; json?: boolean },
  { signal }: Pick<Surroundings, 'signal'>,
): Promise<void> {
  const to = FORMAT_IDS.find((id) => id === flags.to);
  if (!to) throw new InputError('--to', `no format "${flags.to}"`, `use one of ${FORMAT_IDS.join(', ')}`);
  const line = new ProgressLine();
  const files = await convertBundle({ bundle, ...flags, to, signal, onProgress: line.show.bind(line) });
  line.clear();
  const lines = files.map(({ path, bytes, sha256 }) => `${path} (${bytes} bytes, SHA-256 ${sha256})`);
  process.stdout.write(`${flags.json ? JSON.stringify({ bundle, format: to, files }) : lines.join('\n')}\n`);
}
