import { resolve } from 'node:path';
import { auditOf } from '../src/audit/audit';
import { FolderInTheMaking } from '../src/handover/folder-in-the-making';
import type { Manifest } from '../src/handover/manifest';
import {
  describeReplicas,
  MANIFEST,
  REPLICAS,
  writeBundleFiles,
  writeManifest,
  type BundleContents,
} from '../src/handover/write-bundle';
import { posteriorOf, type Posterior } from '../src/posterior/posterior';
import { priorOf } from '../src/posterior/prior';
import { summarise } from '../src/posterior/summary';
import { InputError, stopIfCancelled } from '../src/study/input-error';
import type { Axis } from '../src/study/axis';
import { resolveAxis, type Study } from '../src/study/study';
import type { Tally } from '../src/tally/tally';
import { drawEnsemble } from './draw-ensemble';
import type { Progress } from './progress';
import type { InputFile, RejectedRow } from './read-events';

/** What a bundle is built from: a finished tally, and where it came from. */
export interface BundleSource {
  tally: Tally;
  inputs: InputFile[];
  rejectedRows(): Iterable<RejectedRow>;
}

export interface BuildOptions {
  study: Study;
  /** Names the study in errors. */
  where: string;
  source: BundleSource;
  out: string;
  version: string;
  drawWorker: URL;
  workers: number;
  signal?: AbortSignal | undefined;
  onProgress?: (progress: Progress) => void;
}

/** A bundle as it was written. */
export interface BuiltBundle {
  out: string;
  manifest: Manifest;
  contents: BundleContents;
}

/**
 * Posterior, audit, ensemble and hand-over of a tally, written as a bundle at `out`. An interrupted or failed build
 * leaves the old bundle, or none. Throws `InputError` where a column has no posterior, or the place cannot be written.
 */
export async function buildBundle(options: BuildOptions): Promise<BuiltBundle> {
  const { study, source, signal, version } = options;
  const out = resolve(options.out);
  const model = modelOf(study, source.tally, options.where);
  const folder = new FolderInTheMaking(out, MANIFEST);
  try {
    const { replicas, seed } = study.ensemble;
    const path = folder.pathOf(REPLICAS);
    const drawing = drawEnsemble({ ...options, parameters: model.posterior, seed, replicas, path, place: out });
    // Audit and tables are made while the workers draw; a fault in them must not leave the drawing without a listener.
    drawing.catch(() => undefined);
    const contents = { version, study, ...bundleSource(source), ...model, ...auditedModel(study, source.tally, model) };
    writeBundleFiles(folder, contents);
    const drawn = await drawing;
    folder.record(REPLICAS, drawn.bytes, drawn.sha256);
    describeReplicas(folder, drawn.shape);
    stopIfCancelled(signal);
    const manifest = writeManifest(folder, contents);
    folder.finish();
    return { out, manifest, contents };
  } catch (error) {
    folder.abandon();
    throw error;
  }
}

function bundleSource({ tally, inputs, rejectedRows }: BundleSource) {
  const named = inputs.map(({ name, bytes, sha256, rows, rejected }) => ({ file: name, bytes, sha256, rows, rejected }));
  return { tally, inputs: named, rejectedRows: rejectedRows() };
}

/** Axes and posterior of a tally. Throws `InputError` where the prior gives a column none. */
export function modelOf(study: Study, tally: Tally, where: string): Model {
  const trueAxis = resolveAxis(study.axes.true);
  const recoAxis = resolveAxis(study.axes.reconstructed);
  const posterior = posteriorOf(tally.cells, priorOf(study.prior, tally, trueAxis, recoAxis));
  checkPosterior(tally, posterior, where);
  return { trueAxis, recoAxis, posterior };
}

export interface Model {
  trueAxis: Axis;
  recoAxis: Axis;
  posterior: Posterior;
}

function auditedModel(study: Study, tally: Tally, model: Model) {
  const summary = summarise(model.posterior, tally.cells.events, study.credibility);
  return { summary, audit: auditOf({ study, tally, ...model }) };
}

/** A prior of zero is proper only where every outcome of every column was seen (statistics.md 3). */
function checkPosterior(tally: Tally, { shape, outcomes }: Posterior, where: string): void {
  const unseen = shape.indexOf(0);
  if (unseen < 0) return;
  const column = tally.columnNames[Math.floor(unseen / outcomes)];
  throw new InputError(
    `${where}: prior`,
    `a prior of zero, but column ${column} has no event in outcome ${tally.outcomeNames[unseen % outcomes]}`,
    'give a pseudo-count above 0 (0.5 is Jeffreys), or merge bins until every outcome is seen',
  );
}
