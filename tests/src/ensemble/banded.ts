import type { SamplerParameters } from '../../../src/ensemble/draw';

/** A matrix as campaigns make it: `events` in each column near its own bin (Gaussian, 3 bins wide), `prior` in every cell. */
export function banded(columns: number, outcomes: number, events: number, prior: number): SamplerParameters {
  const shape = new Float64Array(columns * outcomes);
  for (let column = 0; column < columns; column++) {
    const centre = 1 + ((outcomes - 3) * column) / columns;
    const weights = Float64Array.from({ length: outcomes }, (_, k) => Math.exp(-0.5 * ((k - centre) / 3) ** 2));
    const total = weights.reduce((a, b) => a + b);
    weights.forEach((w, k) => (shape[column * outcomes + k] = Math.round((events * w) / total) + prior));
  }
  return { columns, outcomes, shape, scale: null };
}
