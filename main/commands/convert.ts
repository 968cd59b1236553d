import type { FormatId } from '../../src/handover/formats';
import type { ReplicaRange } from '../../src/handover/handover-options';
import { convertBundle } from '../convert';
import { ProgressLine } from '../progress-line';
import type { Surroundings } from '../surroundings';

/** `entasis convert BUNDLE --to FORMAT --out FILE`: prints each file written, its bytes and SHA-256. */
export async function convert(
  bundle: string,
  flags: { to: FormatId; out: string; replicas?: ReplicaRange; json?: boolean },
  { signal }: Pick<Surroundings, 'signal'>,
): Promise<void> {
  const line = new ProgressLine();
  const files = await convertBundle({ bundle, ...flags, signal, onProgress: line.show.bind(line) });
  line.clear();
  const lines = files.map(({ path, bytes, sha256 }) => `${path} (${bytes} bytes, SHA-256 ${sha256})`);
  process.stdout.write(`${flags.json ? JSON.stringify({ bundle, format: flags.to, files }) : lines.join('\n')}\n`);
}
