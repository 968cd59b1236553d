import { describe, expect, it } from 'vitest';
import {
  coloursOf,
  colourTable,
  divergingColour,
  hatch,
  packed,
  paint,
  sequentialColour,
  SHADES,
} from '../../renderer/draw/heat-map';
import { lab } from 'd3';

const NONE = 7;
const table = Uint32Array.from({ length: SHADES }, (_, i) => i);

describe('colours of the matrix', () => {
  it('packs red, green, blue and alpha as a little-endian canvas holds them', () => {
    const bytes = new Uint8Array(Uint32Array.of(packed('#0a6274')).buffer);
    expect([...bytes]).toEqual([0x0a, 0x62, 0x74, 0xff]);
  });

  it('spans the extent on both scales, and gives what has no place the colour of none', () => {
    const linear = coloursOf([0, 5, 10, 20, NaN], { kind: 'linear', from: 0, to: 10 }, table, NONE);
    expect([...linear]).toEqual([0, Math.round((SHADES - 1) / 2), SHADES - 1, SHADES - 1, NONE]);
    const log = coloursOf([0, 0.01, 1, 100], { kind: 'log', from: 0.01, to: 100 }, table, NONE);
    expect([log[0], log[1], log[3]]).toEqual([NONE, 0, SHADES - 1]);
    expect(Math.abs(log[2]! - (SHADES - 1) / 2)).toBeLessThanOrEqual(0.5);
  });

  // Perceptually even: lightness in CIELAB goes one way, and in steps of like size.
  for (const dark of [false, true]) {
    it(`grow evenly in lightness on the ${dark ? 'dark' : 'light'} theme`, () => {
      const lightness = Array.from({ length: 11 }, (_, i) => lab(sequentialColour(i / 10, dark)).l);
      const steps = lightness.slice(1).map((l, i) => (dark ? l - lightness[i]! : lightness[i]! - l));
      expect(Math.min(...steps)).toBeGreaterThan(2);
      expect(Math.max(...steps)).toBeLessThan(16);
    });
  }

  it('draw differences from orange to purple, pale in the middle: never red against green', () => {
    const middle = lab(divergingColour(0.5)).l;
    expect(middle).toBeGreaterThan(90);
    expect(lab(divergingColour(0)).l).toBeLessThan(50);
    expect(lab(divergingColour(1)).l).toBeLessThan(50);
    expect(colourTable(divergingColour)).toHaveLength(SHADES);
  });
});

describe('painting', () => {
  const painting = {
    width: 5,
    height: 4,
    columnOf: Int16Array.of(0, 0, -1, 1, 1),
    outcomeOf: Int16Array.of(1, 1, -1, 0),
    colours: Uint32Array.of(10, 11, 20, 21),
    outcomes: 2,
    gap: 1,
  };

  it('fills every pixel with the colour of its cell, gaps with theirs', () => {
    const pixels = new Uint32Array(20);
    paint(pixels, painting);
    expect([...pixels.subarray(0, 5)]).toEqual([11, 11, 1, 21, 21]);
    expect([...pixels.subarray(5, 10)]).toEqual([11, 11, 1, 21, 21]);
    expect([...pixels.subarray(10, 15)]).toEqual([1, 1, 1, 1, 1]);
    expect([...pixels.subarray(15)]).toEqual([10, 10, 1, 20, 20]);
  });

  it('hatches doubtful cells alone', () => {
    const pixels = new Uint32Array(20);
    paint(pixels, painting);
    hatch(pixels, painting, Uint8Array.of(0, 1, 0, 0), 99);
    const rows = [pixels.subarray(0, 5), pixels.subarray(15)].map((row) => [...row]);
    expect(rows[0]).toEqual([99, 11, 1, 21, 21]);
    expect(rows[1]).not.toContain(99);
  });

  it('paints 200 by 200 cells on a screen of high density within a frame of 16 ms', () => {
    const size = { width: 2400, height: 1800 };
    const of = (pixels: number) => Int16Array.from({ length: pixels }, (_, i) => Math.floor((i * 200) / pixels));
    const large = {
      ...size,
      columnOf: of(size.width),
      outcomeOf: of(size.height),
      colours: new Uint32Array(40_000).fill(5),
      outcomes: 200,
      gap: 1,
    };
    const pixels = new Uint32Array(size.width * size.height);
    paint(pixels, large);
    const times = Array.from({ length: 9 }, () => {
      const start = performance.now();
      paint(pixels, large);
      return performance.now() - start;
    });
    times.sort((a, b) => a - b);
    expect(times[4]).toBeLessThan(16);
  });
});
