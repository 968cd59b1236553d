import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import { domainOf, ticksAcross, ticksOf, tickText } from '../../renderer/draw/ticks';

describe('ticks', () => {
  it('stand inside the range, each with a label of its own', () => {
    fc.assert(
      fc.property(
        fc.double({ min: -1e6, max: 1e6, noNaN: true }),
        fc.double({ min: 1e-3, max: 1e6, noNaN: true }),
        fc.integer({ min: 100, max: 1000 }),
        (from, size, room) => {
          const ticks = ticksOf('linear', from, from + size, room, 64);
          const texts = ticks.map(({ text }) => text);
          expect(new Set(texts).size).toBe(texts.length);
          for (const { value } of ticks) {
            expect(value).toBeGreaterThanOrEqual(from - size * 1e-9);
            expect(value).toBeLessThanOrEqual(from + size * (1 + 1e-9));
          }
        },
      ),
    );
  });

  it('are never left at one where there is room for three', () => {
    const texts = ticksOf('linear', -4.78, 4.78, 144, 44).map(({ text }) => text);
    expect(texts.length).toBeGreaterThanOrEqual(3);
    expect(texts).toContain('0');
  });

  it('name the powers of ten of a log axis and leave the others unnamed', () => {
    const ticks = ticksOf('log', 0.5, 2000, 400, 60);
    expect(ticks.filter(({ text }) => text !== '').map(({ text }) => text)).toEqual(['1', '10', '100', '1\u202f000']);
    expect(ticks.find(({ value }) => value === 20)?.text).toBe('');
    expect(ticks.find(({ value }) => value === 0.5)?.text).toBe('');
  });

  it('skip decades where they would stand too close', () => {
    const named = ticksOf('log', 1e-9, 1, 120, 40).filter(({ text }) => text !== '');
    expect(named.length).toBeLessThanOrEqual(4);
    expect(named.length).toBeGreaterThanOrEqual(2);
  });

  it('name 2 and 5 too where a log axis has room for them', () => {
    const named = (room: number) => ticksOf('log', 0.5, 20, room, 60).filter(({ text }) => text !== '');
    expect(named(400).map(({ value }) => value)).toEqual([0.5, 1, 2, 5, 10, 20]);
    expect(named(200).map(({ value }) => value)).toEqual([1, 10]);
  });

  it('step evenly on a log axis of less than 0.7 decades', () => {
    const named = ticksOf('log', 20, 90, 400, 60).filter(({ text }) => text !== '');
    const steps = named.slice(1).map(({ value }, i) => value - named[i]!.value);
    expect(new Set(steps).size).toBe(1);
    expect(ticksOf('log', 20, 110, 400, 60).some(({ text }) => text === '')).toBe(true);
  });

  it('leave labels that run across room beside one another', () => {
    const ticks = ticksAcross('linear', -1e-12, 1e-12, 264, 44);
    const width = Math.max(...ticks.map(({ text }) => text.length)) * 8 + 10;
    expect(ticks.length * width).toBeLessThanOrEqual(264 + width);
  });

  it('write binary noise as the decimal that was meant', () => {
    expect(tickText(0.1 + 0.2)).toBe('0.3');
    expect(tickText(2e-7)).toBe('2\u202f\u00d7\u202f10\u207b\u2077');
    expect(tickText(1e6)).toBe('10\u2076');
  });
});

describe('the domain of a picture', () => {
  it('begins at zero where zero means something', () => {
    expect(domainOf([3, 8], { zero: true, log: false })[0]).toBe(0);
    expect(domainOf([3, 8], { zero: false, log: false })[0]).toBeLessThan(3);
  });

  it('has a height even where every value is zero, missing or not positive', () => {
    expect(domainOf([0, 0], { zero: true, log: false })).toEqual([0, 1]);
    expect(domainOf([NaN], { zero: true, log: false })).toEqual([0, 1]);
    expect(domainOf([0, -1], { zero: false, log: true })).toEqual([0.1, 1]);
  });
});
