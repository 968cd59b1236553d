import { existsSync, mkdtempSync, rmSync } from 'node:fs';
import { writeFile } from 'node:fs/promises';
import { tmpdir } from 'node:os';
import { join, resolve } from 'node:path';
import { openBundle } from '../src/handover/open-bundle';
import type { Manifest } from '../src/handover/manifest';
import { reportHtml } from '../src/handover/report/report';
import { weigh, writeWhole, type WrittenFile } from '../src/handover/whole-file';
import { REPLICAS } from '../src/handover/write-bundle';
import { InputError, stopIfCancelled } from '../src/study/input-error';
import { checkPlace } from './convert';
import { printPdf } from './print-pdf';
import type { Progress } from './progress';

export interface ReportOptions {
  bundle: string;
  /** The file to write. */
  out: string;
  /** As PDF, printed by `print`; else as HTML. */
  pdf: boolean;
  /** Whether a file that stands there may be replaced; it may where this is left out. */
  replace?: boolean;
  /** Prints an HTML file to a PDF file: by a browser of this machine where it is left out. */
  print?: (html: string, pdf: string, signal?: AbortSignal) => Promise<void>;
  signal?: AbortSignal | undefined;
  onProgress?: ((progress: Progress) => void) | undefined;
}

/**
 * Writes the report of a bundle, whole or not at all. Every file that it rests on is checked against the manifest's hash
 * first. Throws `InputError` for a damaged bundle, a place that cannot be written or lies inside the bundle, and a PDF
 * that nothing here can print.
 */
export async function writeReport(options: ReportOptions): Promise<WrittenFile[]> {
  const { out, pdf, signal, print = printPdf } = options;
  const bundle = openBundle(options.bundle);
  checkPlace(options, 'report.html');
  await checkFiles(bundle.folder, bundle.manifest, options);
  const html = reportHtml(bundle);
  stopIfCancelled(signal);
  return writeWhole([out], ([path]) => (pdf ? printed(html, path!, print, signal) : writeFile(path!, html)), signal);
}

async function printed(
  html: string,
  pdf: string,
  print: NonNullable<ReportOptions['print']>,
  signal: AbortSignal | undefined,
): Promise<void> {
  const folder = mkdtempSync(join(tmpdir(), 'entasis-report-'));
  try {
    const page = join(folder, 'report.html');
    await writeFile(page, html);
    await print(page, resolve(pdf), signal);
  } finally {
    rmSync(folder, { recursive: true, force: true });
  }
}

/** A report of numbers that somebody changed would be worse than none. Replicas are not read: `verify` checks these. */
async function checkFiles(folder: string, { files }: Manifest, { signal, onProgress }: ReportOptions): Promise<void> {
  const named = Object.entries(files).filter(([name]) => name !== REPLICAS);
  for (const [i, [name, { sha256 }]] of named.entries()) {
    const path = join(folder, name);
    const found = existsSync(path) ? (await weigh(path, signal)).sha256 : null;
    if (found !== sha256) {
      const what = found === null ? 'is missing' : 'was changed: its SHA-256 is not the manifest’s';
      throw new InputError(path, what, 'build or copy the bundle again');
    }
    onProgress?.({ stage: 'checking', done: i + 1, total: named.length, unit: 'steps' });
  }
}
