import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import { domainOf, ticksOf, tickText } from '../../renderer/draw/ticks';

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
    expect(ticks.filter(({ text }) => text !== '').map(({ value }) => value)).toEqual([1, 10, 100, 1000]);
    expect(ticks.find(({ value }) => value === 20)?.text).toBe('');
    expect(ticks.find(({ value }) => value === 0.5)?.text).toBe('');
  });

  it('skip decades where they would stand too close', () => {
    const named = ticksOf('log', 1e-9, 1, 120, 40).filter(({ text }) => text !== '');
    expect(named.length).toBeLessThanOrEqual(4);
    expect(named.length).toBeGreaterThanOrEqual(2);
  });

  it('name numbers between the powers where a log axis spans less than one and a half decades', () => {
    const named = ticksOf('log', 20, 90, 400, 60).filter(({ text }) => text !== '');
    expect(named.length).toBeGreaterThanOrEqual(2);
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
