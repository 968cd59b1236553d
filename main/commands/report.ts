import { basename, dirname, join, resolve } from 'node:path';
import { formatCount } from '../../src/audit/wording';
import { ProgressLine } from '../progress-line';
import { writeReport } from '../report';
import type { Surroundings } from '../surroundings';

/** `entasis report BUNDLE [--out FILE] [--pdf]`: prints the file that was written, its bytes and SHA-256. */
export async function report(
  bundle: string,
  flags: { out?: string; pdf?: boolean; json?: boolean },
  { signal }: Pick<Surroundings, 'signal'>,
): Promise<void> {
  const pdf = flags.pdf ?? flags.out?.toLowerCase().endsWith('.pdf') ?? false;
  const line = new ProgressLine();
  const out = flags.out ?? defaultReportFile(bundle, pdf);
  const files = await writeReport({ bundle, out, pdf, signal, onProgress: line.show.bind(line) });
  line.clear();
  const lines = files.map(({ path, bytes, sha256 }) => `${path} (${formatCount(bytes)} bytes, SHA-256 ${sha256})`);
  process.stdout.write(`${flags.json ? JSON.stringify({ bundle, files }) : lines.join('\n')}\n`);
}

/** `mine-report.html` beside `mine.bundle`. */
function defaultReportFile(bundle: string, pdf: boolean): string {
  const name = basename(resolve(bundle)).replace(/\.bundle$/, '');
  return join(dirname(resolve(bundle)), `${name}-report.${pdf ? 'pdf' : 'html'}`);
}
