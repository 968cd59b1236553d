import { describe, expect, it } from 'vitest';
import { answer } from '../../../src/audit/flag';
import { eventsToClear, eventsToSettle, MOST_EVENTS, probabilityBeyond } from '../../../src/audit/limits';
import { PURPOSE, streamOf } from '../../../src/numerics/random';

const beta = (a: number, b: number) => ({ a, b, method: 'exact' as const });

describe('probability of lying beyond a limit', () => {
  it('is that of the Beta, on either side', () => {
    // Beta(1, 1) is uniform; Beta(2, 1) has the cdf x^2 (closed forms).
    expect(probabilityBeyond(beta(1, 1), 0.3, 'above')).toBeCloseTo(0.7, 14);
    expect(probabilityBeyond(beta(2, 1), 0.3, 'below')).toBeCloseTo(0.09, 14);
  });

  it('is 0 or 1 for a certain share and for a limit at an end', () => {
    expect(probabilityBeyond(beta(0, 4), 0.01, 'above')).toBe(0);
    expect(probabilityBeyond(beta(4, 0), 0.99, 'above')).toBe(1);
    expect(probabilityBeyond(beta(1, 4), 0, 'above')).toBe(1);
    expect(probabilityBeyond(beta(0, 4), 0, 'above')).toBe(0);
    expect(probabilityBeyond(beta(1, 4), 1, 'above')).toBe(0);
    expect(probabilityBeyond(beta(1, 4), 1, 'below')).toBe(1);
    expect(probabilityBeyond(beta(1, 4), 0, 'below')).toBe(0);
  });
});

describe('the three answers', () => {
  it('change at the credibility and at one minus it, both inclusive', () => {
    expect(answer(0.95, 0.95)).toBe('flagged');
    expect(answer(0.9499, 0.95)).toBe('undecided');
    expect(answer(1 - 0.95, 0.95)).toBe('clear');
    expect(answer(0.0501, 0.95)).toBe('undecided');
  });
});

describe('events that settle a limit', () => {
  it('settle on the side of the mean', () => {
    for (const [a, b, side, as] of [
      [8, 92, 'above', 'flagged'],
      [3, 97, 'above', 'clear'],
      [3, 97, 'below', 'flagged'],
      [8, 92, 'below', 'clear'],
    ] as const) {
      const settled = eventsToSettle(beta(a, b), 0.05, side, 0.95, 1)!;
      expect(settled.as).toBe(as);
      const later = (events: number) => beta(a + (events * a) / 100, b + (events * b) / 100);
      expect(answer(probabilityBeyond(later(settled.events), 0.05, side), 0.95)).toBe(as);
    }
  });

  it('do so in at least 9 of 10 simulated campaigns whose true share is the mean, and a quarter of them less often', () => {
    const stream = streamOf(5, PURPOSE.test, 0, 0);
    const now = beta(12.5, 188.5);
    const mean = 12.5 / 201;
    const { events, as } = eventsToSettle(now, 0.05, 'above', 0.95, 1)!;
    const settledShare = (added: number): number => {
      let settled = 0;
      for (let campaign = 0; campaign < 1000; campaign++) {
        let inside = 0;
        for (let i = 0; i < added; i++) if (stream.uniform() < mean) inside++;
        const later = beta(now.a + inside, now.b + added - inside);
        if (answer(probabilityBeyond(later, 0.05, 'above'), 0.95) === as) settled++;
      }
      return settled / 1000;
    };
    // Three standard errors of 1000 campaigns at 0.9.
    expect(settledShare(events)).toBeGreaterThan(0.9 - 3 * Math.sqrt(0.09 / 1000));
    expect(settledShare(Math.floor(events / 4))).toBeLessThan(0.9);
  });

  it('are counted in events: an event that adds half an entry is needed twice', () => {
    const one = eventsToSettle(beta(8, 92), 0.05, 'above', 0.99, 1)!.events;
    const half = eventsToSettle(beta(8, 92), 0.05, 'above', 0.99, 0.5)!.events;
    expect(Math.abs(half / one - 2)).toBeLessThan(0.01);
  });

  it('are none where the mean is at the limit, or so near that a thousand million are too few', () => {
    expect(eventsToSettle(beta(5, 95), 0.05, 'above', 0.95, 1)).toBeNull();
    expect(eventsToSettle(beta(5 + 1e-4, 95 - 1e-4), 0.05, 'above', 0.95, 1)).toBeNull();
    const near = eventsToSettle(beta(5 + 4e-3, 95 - 4e-3), 0.05, 'above', 0.95, 1)!;
    expect(near.events).toBeGreaterThan(MOST_EVENTS / 100);
    expect(near.events).toBeLessThanOrEqual(MOST_EVENTS);
  });

  it('that would clear an empty column are those of a closed form: (1 - limit)^n at the most one minus the credibility', () => {
    // Beta(1, 1 + n): P(p > limit) = (1 - limit)^(n + 1).
    const exact = Math.log(0.05) / Math.log(0.95) - 1;
    const least = eventsToClear(beta(1, 1), 0.05, 'above', 0.95, 1)!;
    expect(least).toBeGreaterThanOrEqual(exact);
    expect(least).toBeLessThan(exact + 2);
    expect(eventsToClear(beta(1, 1), 0, 'above', 0.95, 1)).toBeNull();
  });
});
