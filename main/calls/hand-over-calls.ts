import type { BundleWritten, Checked, Verification } from '../bridge';
import { buildBundle } from '../build';
import type { Job } from '../jobs';
import { verifyBundle } from '../verify';
import { studyFiles } from './event-calls';
import type { Desk, Handlers } from './handlers';

/** Writing the bundle and checking it. */
export function handOverCalls(desk: Desk): Handlers<'build' | 'verify'> {
  return {
    build: (argument) => desk.jobs.run(argument.job, (job) => build(desk, argument, job)),
    verify: ({ bundle, job }) => desk.jobs.run(job, (running) => verify(desk, bundle, running)),
  };
}

/** Reads the events where they are not read, and writes the same bytes as the command line does. */
async function build(desk: Desk, argument: Checked<'build'>, job: Job): Promise<BundleWritten> {
  const began = desk.now();
  const files = studyFiles(desk, argument.study, argument.folder);
  const out = desk.chosen.mayWrite(argument.path, 'bundle', argument.replace);
  const { version, workers, workerFiles } = desk;
  const { signal, progress: onProgress } = job;
  const { reading, tally } = await desk.events.source(files, { signal, onProgress });
  const source = { tally, inputs: reading.inputs, rejectedRows: reading.rejectedRows };
  const settings = { version, workers, drawWorker: workerFiles.draw, signal, onProgress };
  const { manifest } = await buildBundle({ study: files.study, where: 'study', folder: files.folder, source, out, ...settings });
  desk.chosen.bundle(out, true);
  const written = Object.entries(manifest.files).map(([name, file]) => ({ name, ...file }));
  return {
    path: out,
    bytes: written.reduce((sum, { bytes }) => sum + bytes, 0),
    files: written,
    ledger: manifest.ledger,
    flags: manifest.flags,
    replicas: manifest.replicas,
    fingerprint: manifest.study.fingerprint,
    seconds: (desk.now() - began) / 1000,
  };
}

async function verify(desk: Desk, bundle: string, { signal, progress }: Job): Promise<Verification> {
  const began = desk.now();
  const path = desk.chosen.mayReadBundle(bundle);
  const { workers, workerFiles } = desk;
  const found = await verifyBundle(path, { drawWorker: workerFiles.draw, workers, signal, onProgress: progress });
  return { ...found, seconds: (desk.now() - began) / 1000 };
}
