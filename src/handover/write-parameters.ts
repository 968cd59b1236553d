import { createWriteStream } from 'node:fs';
import { Readable } from 'node:stream';
import { pipeline } from 'node:stream/promises';
import { sequentialBetas } from '../ensemble/sequential';
import { matchedDirichlet } from '../posterior/matched-dirichlet';
import { columnOf, type Posterior } from '../posterior/posterior';
import type { HandoverOptions } from './handover-options';
import { readArray, readCells, type Bundle } from './open-bundle';
import { provenance } from './provenance';
import { writeWhole, type WrittenFile } from './whole-file';

export const PARAMETERS_SCHEMA = 'entasis.parameters/1';

/** How a reader turns the parameters into columns of a matrix: stands in the file itself. */
const MEANING = {
  dirichlet: 'p ~ Dirichlet(shape)',
  'normalised gammas':
    'x_k ~ scale_k Gamma(shape_k) independent, p = x / sum x; matched_dirichlet has the same means only',
  none: 'no event and no pseudo-count: the column has no posterior',
  sequential:
    'z_k ~ Beta(a_k, b_k) independent for every outcome but the last, p_k = z_k (1 - z_1) ... (1 - z_{k-1}), the last takes the rest; z_k is 0 where a_k is 0, else 1 where b_k is 0',
};

/**
 * Writes one JSON document of the posterior's parameters for samplers further down, a column at a time: Dirichlet
 * parameters and the Beta parameters of their sequential form (Connor & Mosimann, JASA 64 (1969) 194); for a weighted
 * column gamma shapes and scales, and the matched Dirichlet under that name alone. Numbers read back to the bit.
 * Replicas play no part in it.
 */
export async function writeParameters(bundle: Bundle, options: HandoverOptions): Promise<WrittenFile[]> {
  const write = async ([path]: string[]): Promise<void> => {
    await pipeline(Readable.from(documentText(bundle)), createWriteStream(path!), { signal: options.signal });
  };
  return writeWhole([options.out], write, options.signal);
}

function* documentText(bundle: Bundle): Generator<string> {
  const shape = readCells(bundle, 'posterior/shape');
  const scale = readArray(bundle, 'posterior/scale')?.values ?? null;
  const posterior = { outcomes: bundle.outcomes.length, shape, scale };
  const head = { ...provenance(bundle), schema: PARAMETERS_SCHEMA, meaning: MEANING, outcomes: bundle.outcomes };
  yield `${JSON.stringify(head).slice(0, -1)},\n"columns":[`;
  for (const [j, name] of bundle.columns.entries()) {
    yield `${j === 0 ? '' : ','}\n${JSON.stringify({ name, ...parametersOf(posterior, j) })}`;
  }
  yield '\n]}\n';
}

function parametersOf(posterior: Pick<Posterior, 'outcomes' | 'shape' | 'scale'>, j: number): object {
  const { shape, scale } = columnOf(posterior, j);
  if (shape.every((a) => a === 0)) return { distribution: 'none' };
  if (!scale) return { distribution: 'dirichlet', ...dirichlet(shape) };
  const parameters = { distribution: 'normalised gammas', shape: [...shape], scale: [...scale] };
  return { ...parameters, matched_dirichlet: dirichlet(matchedDirichlet(posterior, j)) };
}

function dirichlet(shape: Float64Array): object {
  const { a, b } = sequentialBetas(shape);
  return { shape: [...shape], sequential: { a: [...a], b: [...b] } };
}
