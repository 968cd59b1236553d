/**
 * Tables and draws of the ziggurat method with 256 layers of equal area.
 * Source: Marsaglia & Tsang, "The ziggurat method for generating random variables", J. Stat. Software 5 (2000) 8.
 * Layer (8 bits) and place in the layer (53 bits) come from different bits, as Doornik (2005) asks.
 */
import type { RandomStream } from './random';

const LAYERS = 256;
const LAYER_MASK = LAYERS - 1;
const HIGH = 2 ** 21;
const UNIT = 2 ** -53;

interface Ziggurat {
  /** `edge[i]` is the right end of layer `i`; layer 0 is as wide as its area with the tail would be. `edge[256]` is 0. */
  edge: Float64Array;
  /** Density (unnormalised) at `edge`, for the layers from 1 on. */
  height: Float64Array;
  /** `edge` times 2^-53: turns a 53-bit integer into a place in the layer. */
  step: Float64Array;
}

/** Where the tail begins and the area of a layer, such that 256 layers close at the mode (made with mpmath, see tests/reference/ziggurat). */
const NORMAL_TAIL = 3.6541528853610088;
const NORMAL_AREA = 0.0049286732339746557;
const EXPONENTIAL_TAIL = 7.69711747013105;
const EXPONENTIAL_AREA = 0.003949659822581557;

const normalDensity = (x: number): number => Math.exp((-x * x) / 2);
const exponentialDensity = (x: number): number => Math.exp(-x);

export const NORMAL = layers(NORMAL_TAIL, NORMAL_AREA, normalDensity, (y) => Math.sqrt(-2 * Math.log(y)));
export const EXPONENTIAL = layers(EXPONENTIAL_TAIL, EXPONENTIAL_AREA, exponentialDensity, (y) => -Math.log(y));

function layers(tail: number, area: number, density: (x: number) => number, inverse: (y: number) => number): Ziggurat {
  const edge = new Float64Array(LAYERS + 1);
  edge[0] = area / density(tail);
  edge[1] = tail;
  for (let i = 2; i < LAYERS; i++) edge[i] = inverse(area / edge[i - 1]! + density(edge[i - 1]!));
  return { edge, height: edge.map(density), step: edge.map((x) => x * UNIT) };
}

export function halfNormal(stream: RandomStream): number {
  let at = stream.at;
  if (at > stream.lastPair) { stream.refill(); at = stream.at; }
  const low = stream.words[at]!;
  const high = stream.words[at + 1]!;
  stream.at = at + 2;
  const layer = low & LAYER_MASK;
  const x = ((high >>> 0) * HIGH + (low >>> 11) + 0.5) * NORMAL.step[layer]!;
  return x < NORMAL.edge[layer + 1]! ? x : halfNormalRest(stream, layer, x);
}

export function halfNormalRest(stream: RandomStream, layer: number, x: number): number {
  if (layer === 0) return normalTail(stream);
  const y = NORMAL.height[layer]! + stream.uniform() * (NORMAL.height[layer + 1]! - NORMAL.height[layer]!);
  return y < normalDensity(x) ? x : halfNormal(stream);
}
function normalTail(stream: RandomStream): number {
  for (;;) {
    const x = -Math.log(stream.uniform()) / NORMAL_TAIL;
    const y = -Math.log(stream.uniform());
    if (2 * y > x * x) return NORMAL_TAIL + x;
  }
}
