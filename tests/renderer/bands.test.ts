import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import { bandAt, bandOfPixels, binShares, GAP, layBands, moved, WHOLE, zoomed } from '../../renderer/draw/bands';
import type { NumericAxis, TagAxis } from '../../src/study/axis';

const axis: NumericAxis = {
  kind: 'numeric',
  label: '',
  unit: 'MeV',
  spacing: 'linear',
  edges: Float64Array.of(0, 1, 3, 7),
};
const tags: TagAxis = { kind: 'tags', label: '', unit: '', tags: ['electron', 'pion', 'muon'] };
const lay = (extra: object = {}) => layBands({ axis, lost: true, length: 400, equal: false, view: WHOLE, ...extra });

describe('the layout of the heat map', () => {
  it('draws bins true to scale by default', () => {
    const { from, to } = lay();
    const width = (i: number) => to[i]! - from[i]!;
    expect(width(2) / width(1)).toBeCloseTo(2, 10);
    expect(width(3) / width(1)).toBeCloseTo(4, 10);
  });

  it('draws bins equally wide on the switch', () => {
    const { from, to } = lay({ equal: true });
    expect(to[1]! - from[1]!).toBeCloseTo(to[3]! - from[3]!, 10);
  });

  it('draws bins of a log axis by their ratios', () => {
    const shares = binShares({ ...axis, spacing: 'log', edges: Float64Array.of(1, 10, 1000) }, false);
    expect([...shares]).toEqual([0, expect.closeTo(1 / 3, 12), 1]);
  });

  it('sets lost, below and above apart from the window by a gap', () => {
    const { from, to, window } = lay();
    const [below, above, lost] = [0, 4, 5];
    expect(from[lost]).toBe(0);
    expect(from[below]! - to[lost]!).toBeGreaterThan(0);
    expect(window.from - to[below]!).toBe(GAP);
    expect(from[above]! - window.to).toBe(GAP);
    expect(to[above]).toBe(400);
  });

  it('has no below and no above for tags', () => {
    const { from, window } = layBands({ axis: tags, lost: false, length: 300, equal: false, view: WHOLE });
    expect([...from]).toEqual([0, 100, 200]);
    expect(window).toEqual({ from: 0, to: 300 });
  });

  it('clips zoomed bins at the window and leaves out those outside of it', () => {
    const { from, to, window } = lay({ view: { from: 0.5, to: 1 } });
    expect(Number.isNaN(from[1]!)).toBe(true);
    expect(from[3]).toBe(window.from);
    expect(to[3]).toBeCloseTo(window.to, 10);
    expect(from[0]).not.toBeNaN();
  });

  it('places a value where its bin edges are', () => {
    const { from, to, place } = lay();
    expect(place!(1)).toBeCloseTo(from[2]!, 10);
    expect(place!(7)).toBeCloseTo(to[3]!, 10);
    expect(place!(2)).toBeCloseTo((from[2]! + to[2]!) / 2, 10);
  });

  it('finds the band of a position, none in a gap', () => {
    const bands = lay();
    expect(bandAt(bands, bands.from[2]!)).toBe(2);
    expect(bandAt(bands, bands.to[2]!)).toBe(3);
    expect(bandAt(bands, bands.window.from - 1)).toBe(-1);
    expect(bandAt(bands, -5)).toBe(-1);
  });

  it('gives each pixel at most one band and each band of a pixel or more its pixels', () => {
    fc.assert(
      fc.property(
        fc.integer({ min: 200, max: 900 }),
        fc.constantFrom(1, 1.25, 2),
        fc.boolean(),
        (length, ratio, flip) => {
          const bands = layBands({ axis, lost: true, length, equal: false, view: WHOLE });
          const pixels = Math.round(length * ratio);
          const of = bandOfPixels(bands, pixels, ratio, flip);
          for (let i = 0; i < bands.from.length; i++) {
            const wanted = (bands.to[i]! - bands.from[i]!) * ratio;
            const got = of.filter((band) => band === i).length;
            expect(Math.abs(got - wanted)).toBeLessThanOrEqual(1);
          }
        },
      ),
    );
  });

  it('turns upside down where the picture grows upwards', () => {
    const bands = lay();
    const up = bandOfPixels(bands, 400, 1, true);
    const across = bandOfPixels(bands, 400, 1, false);
    expect([...up].reverse()).toEqual([...across]);
  });
});

describe('zoom', () => {
  it('keeps the place under the pointer and stays inside the whole', () => {
    fc.assert(
      fc.property(
        fc.double({ min: 0, max: 1, noNaN: true }),
        fc.double({ min: 0.1, max: 0.9, noNaN: true }),
        (at, factor) => {
          const view = zoomed(WHOLE, factor, at);
          expect(view.from).toBeGreaterThanOrEqual(0);
          expect(view.to).toBeLessThanOrEqual(1 + 1e-12);
          expect((at - view.from) / (view.to - view.from)).toBeCloseTo(at, 9);
        },
      ),
    );
  });

  it('returns to the whole by zooming out, and stops at the narrowest view', () => {
    const close = zoomed(WHOLE, 1e-9, 0.3);
    expect(close.to - close.from).toBeCloseTo(0.002, 12);
    expect(zoomed(close, 1e9, 0.3)).toEqual(WHOLE);
  });

  it('moves without leaving the whole', () => {
    expect(moved({ from: 0.2, to: 0.4 }, 5)).toEqual({ from: 0.8, to: expect.closeTo(1, 12) });
    expect(moved({ from: 0.2, to: 0.4 }, -5).from).toBe(0);
  });
});
