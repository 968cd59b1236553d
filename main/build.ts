import { readFileSync } from 'node:fs';
import { resolve } from 'node:path';
import { analyseModel, modelOf, type Analysis, type Model } from '../src/handover/analyse';
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
import { InputError, stopIfCancelled } from '../src/study/input-error';
import type { Study } from '../src/study/study';
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
  /** The study's folder: the table of a reference spectrum is relative to it. */
  folder: string;
  source: BundleSource;
  out: string;
  version: string;
  drawWorker: URL;
  workers: number;
  /** Works out what follows from the model in another thread; where it is absent, this one does. */
  analyse?: (model: Model) => Promise<Analysis>;
  signal?: AbortSignal | undefined;
  onProgress?: (progress: Progress) => void;
}

/** Blocks may be drawn this far ahead of the writing, which waits while the audit and the tables are made. */
const AHEAD = 64 << 20;

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
  const sources = { where: options.where, readTable: tableReader(options.folder) };
  const folder = new FolderInTheMaking(out, MANIFEST);
  try {
    const { replicas, seed } = study.ensemble;
    const path = folder.pathOf(REPLICAS);
    const drawing = drawEnsemble({
      ...options,
      parameters: model.posterior,
      seed,
      replicas,
      path,
      place: out,
      ahead: AHEAD,
    });
    // Audit and tables are made while the workers draw; a fault in them must not leave the drawing without a listener.
    drawing.catch(() => undefined);
    const analysis = options.analyse ? await options.analyse(model) : analyseModel(model, sources);
    const contents = { version, ...bundleSource(source), ...analysis };
    if (study.reference.file !== undefined) folder.write('reference.csv', sources.readTable(study.reference.file));
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

function bundleSource({ inputs, rejectedRows }: BundleSource) {
  const named = inputs.map(({ name, bytes, sha256, rows, rejected }) => ({
    file: name,
    bytes,
    sha256,
    rows,
    rejected,
  }));
  return { inputs: named, rejectedRows: rejectedRows() };
}

/** Reads a table that a study in `folder` names. Throws `InputError` where it cannot be read. */
export function tableReader(folder: string): (file: string) => string {
  return (file) => {
    try {
      return readFileSync(resolve(folder, file), 'utf8');
    } catch (cause) {
      throw new InputError(file, 'the reference table cannot be read', 'correct reference.file of the study', {
        cause,
      });
    }
  };
}
