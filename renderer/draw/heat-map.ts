import { interpolateBuPu, interpolateMagma, interpolatePuOr, rgb } from 'd3';
import { makeScale, type Extent } from './scale';

/** Colours a table holds: finer than any screen shows. */
export const SHADES = 1024;
/** A colour as a canvas' 32-bit pixel holds it on a little-endian machine. */
export function packed(colour: string): number {
  const { r, g, b } = rgb(colour);
  return ((255 << 24) | (Math.round(b) << 16) | (Math.round(g) << 8) | Math.round(r)) >>> 0;
}

/**
 * The scale of the matrix, perceptually even and safe for colour-blind eyes. What is small is quiet on either theme:
 * the scale begins at the light of the paper and gains ink, or begins in the dark and gains light.
 */
export function sequentialColour(share: number, dark: boolean): string {
  return dark ? interpolateMagma(share) : interpolateBuPu(share);
}

/** For differences alone: orange below, purple above, nothing in the middle. */
export function divergingColour(share: number): string {
  return interpolatePuOr(share);
}

export function colourTable(colour: (share: number) => string): Uint32Array {
  return Uint32Array.from({ length: SHADES }, (_, i) => packed(colour(i / (SHADES - 1))));
}

/** Colour of every value; `none` for what is not a number, or has no place on a log scale. */
export function coloursOf(values: ArrayLike<number>, extent: Extent, table: Uint32Array, none: number): Uint32Array {
  const scale = makeScale(extent, [0, SHADES - 1]).clamp(true);
  const colours = new Uint32Array(values.length);
  for (let i = 0; i < values.length; i++) {
    const x = values[i]!;
    const shown = Number.isFinite(x) && (extent.kind === 'linear' || x > 0);
    colours[i] = shown ? table[Math.round(scale(x))]! : none;
  }
  return colours;
}

export interface Painting {
  width: number;
  height: number;
  /** Column of every pixel across, outcome of every pixel down; -1 in a gap. */
  columnOf: Int16Array;
  outcomeOf: Int16Array;
  /** `[columns, outcomes]`, packed. */
  colours: Uint32Array;
  outcomes: number;
  /** Colour of the gaps. */
  gap: number;
}

/** Paints cells into pixels. Rows of pixels that lie in the same outcome are copied, not painted again. */
export function paint(pixels: Uint32Array, painting: Painting): void {
  const { width, height, columnOf, outcomeOf, colours, outcomes, gap } = painting;
  for (let y = 0; y < height; y++) {
    const k = outcomeOf[y]!;
    const start = y * width;
    if (y > 0 && k === outcomeOf[y - 1]) {
      pixels.copyWithin(start, start - width, start);
    } else if (k < 0) {
      pixels.fill(gap, start, start + width);
    } else {
      for (let x = 0; x < width; x++) {
        const j = columnOf[x]!;
        pixels[start + x] = j < 0 ? gap : colours[j * outcomes + k]!;
      }
    }
  }
}

/** Distance of hatch lines and their width, in device pixels. */
const HATCH = { every: 6, wide: 1 };

/** Draws slanted lines over the cells that `doubtful` marks. */
export function hatch(pixels: Uint32Array, painting: Painting, doubtful: Uint8Array, ink: number): void {
  const { width, height, columnOf, outcomeOf, outcomes } = painting;
  for (let y = 0; y < height; y++) {
    const k = outcomeOf[y]!;
    if (k < 0) continue;
    for (let x = (HATCH.every - (y % HATCH.every)) % HATCH.every; x < width; x += HATCH.every) {
      for (let w = 0; w < HATCH.wide && x + w < width; w++) {
        const j = columnOf[x + w]!;
        if (j >= 0 && doubtful[j * outcomes + k]) pixels[y * width + x + w] = ink;
      }
    }
  }
}
