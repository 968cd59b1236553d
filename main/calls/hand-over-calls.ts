import type { BundleWritten, Checked, Verification, WrittenFiles } from '../bridge';
import type { Model } from '../../src/handover/analyse';
import { buildBundle } from '../build';
import { convertBundle } from '../convert';
import type { Job } from '../session/jobs';
import { writeReport } from '../report';
import { verifyBundle } from '../verify';
import { studyFiles } from './event-calls';
import type { Desk, Handlers } from './handlers';
import { referenceTable } from './matrix-calls';

/** Writing the bundle, checking it, and handing it over in other formats. */
export function handOverCalls(desk: Desk): Handlers<'build' | 'verify' | 'convert' | 'report'> {
  return {
    build: (argument) => desk.jobs.run(argument.job, (job) => build(desk, argument, job)),
    verify: ({ bundle, job }) => desk.jobs.run(job, (running) => verify(desk, bundle, running)),
    report: (argument) => desk.jobs.run(argument.job, (job) => report(desk, argument, job)),
    convert: (argument) => desk.jobs.run(argument.job, (job) => convert(desk, argument, job)),
  };
}

/** Reads the events where they are not read, and writes the same bytes as the command line does. */
async function build(desk: Desk, argument: Checked<'build'>, job: Job): Promise<BundleWritten> {
  const began = desk.now();
  const files = studyFiles(desk, argument.study, argument.folder);
  const out = desk.chosen.mayWrite(argument.path, 'bundle', argument.replace);
  const { version, workers, workerFiles } = desk;
  const { signal, progress: onProgress } = job;
  const { reading, ...keyed } = await desk.events.source(files, { signal, onProgress });
  const { tally } = keyed;
  const asked = { study: files.study, referenceTable: referenceTable(desk, files.study, files.folder) };
  const analyse = async (model: Model) => ({
    ...model,
    ...(await desk.audits.ask(keyed, 'analysis', asked, { signal })),
  });
  const source = { tally, inputs: reading.inputs, rejectedRows: reading.rejectedRows };
  const settings = { version, workers, drawWorker: workerFiles.draw, signal, onProgress };
  const { manifest } = await buildBundle({
    study: files.study,
    where: 'study',
    folder: files.folder,
    source,
    out,
    analyse,
    ...settings,
  });
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

async function convert(desk: Desk, argument: Checked<'convert'>, job: Job): Promise<WrittenFiles> {
  const began = desk.now();
  const bundle = desk.chosen.mayReadBundle(argument.bundle);
  const out = desk.chosen.mayWrite(argument.path, 'converted', argument.replace);
  const [from, to] = argument.replicas ?? [];
  const replicas = from === undefined || to === undefined ? undefined : { from, to };
  const { signal, progress: onProgress } = job;
  const { replace } = argument;
  const files = await convertBundle({ bundle, to: argument.to, out, replicas, replace, signal, onProgress });
  return { files, seconds: (desk.now() - began) / 1000 };
}

async function report(desk: Desk, argument: Checked<'report'>, job: Job): Promise<WrittenFiles> {
  const began = desk.now();
  const bundle = desk.chosen.mayReadBundle(argument.bundle);
  const out = desk.chosen.mayWrite(argument.path, 'report', argument.replace);
  const { pdf, replace } = argument;
  const print = desk.desktop?.print;
  const { signal, progress: onProgress } = job;
  const files = await writeReport({ bundle, out, pdf, replace, ...(print && { print }), signal, onProgress });
  return { files, seconds: (desk.now() - began) / 1000 };
}
