import { existsSync, readFileSync, renameSync, rmSync, statSync } from 'node:fs';
import { join, resolve } from 'node:path';
import type { SamplerParameters } from '../../src/ensemble/draw';
import { cannotWrite } from '../../src/handover/folder-in-the-making';
import { parseManifest } from '../../src/handover/manifest';
import { readNpy } from '../../src/handover/npy';
import { InputError } from '../../src/study/input-error';
import { drawEnsemble } from '../draw-ensemble';
import { ProgressLine } from '../progress-line';
import type { Surroundings } from '../surroundings';

export interface DrawFlags {
  out: string;
  replicas?: number;
  seed?: number;
  workers: number;
  hash?: boolean;
  json?: boolean;
}

/**
 * `entasis draw BUNDLE --out FILE`: replicas from a bundle's posterior, as many as asked for, into one NPY file. With the
 * bundle's own seed they continue the bundle's replicas.
 */
export async function draw(bundle: string, flags: DrawFlags, around: Surroundings): Promise<void> {
  const { parameters, seed, replicas } = readPosterior(bundle);
  const out = resolve(flags.out);
  if (existsSync(out) && !statSync(out).isFile()) throw new InputError(out, 'is not a file', 'name a file to write');
  const partial = `${out}.partial-${process.pid}`;
  const line = new ProgressLine();
  const options = {
    parameters,
    seed: flags.seed ?? seed,
    replicas: flags.replicas ?? replicas,
    workers: flags.workers,
  };
  try {
    const drawn = await drawEnsemble(
      {
        ...around,
        ...options,
        path: partial,
        place: out,
        onProgress: line.show.bind(line),
      },
      flags.hash ?? false,
    );
    renameSync(partial, out);
    line.clear();
    const { bytes, shape, sha256 } = drawn;
    const told = { out, bytes, shape, seed: options.seed, ...(flags.hash && { sha256 }) };
    process.stdout.write(
      flags.json
        ? `${JSON.stringify(told)}\n`
        : `${out} [${shape.join(', ')}], seed ${told.seed}${flags.hash ? `, SHA-256 ${sha256}` : ''}\n`,
    );
  } catch (error) {
    rmSync(partial, { force: true });
    throw (error as NodeJS.ErrnoException).syscall ? cannotWrite(out, error) : error;
  }
}

function readPosterior(bundle: string): { parameters: SamplerParameters; seed: number; replicas: number } {
  const place = join(bundle, 'manifest.json');
  if (!existsSync(place)) throw new InputError(bundle, 'no manifest.json', 'name the folder of a bundle');
  const { columns, outcomes, weighted, seed, replicas } = parseManifest(readFileSync(place, 'utf8'), place);
  const read = (name: string): Float64Array => {
    const path = join(bundle, 'posterior', `${name}.npy`);
    const { values } = readNpy(path);
    if (values.length === columns.length * outcomes.length) return values;
    throw new InputError(path, 'not of the shape the manifest says', 'the bundle is damaged: build it again');
  };
  const scale = weighted ? read('scale') : null;
  return {
    parameters: { columns: columns.length, outcomes: outcomes.length, shape: read('shape'), scale },
    seed,
    replicas,
  };
}
