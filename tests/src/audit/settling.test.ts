import { describe, expect, it } from 'vitest';
import { ASSURANCE, entriesToSettle, growthToSettle, MOST_GROWTH, settledShare } from '../../../src/audit/settling';
import { betaVariate } from '../../../src/audit/draws';
import { binomialVariate } from '../../../src/numerics/binomial-variate';
import { betaCdf } from '../../../src/numerics/beta';
import { normalCdf } from '../../../src/numerics/normal';
import { PURPOSE, streamOf } from '../../../src/numerics/random';

const SIMULATED = 4000;
const CREDIBILITY = 0.95;
const within = (share: number): number => 4 * Math.sqrt((share * (1 - share)) / SIMULATED);
const exact = (a: number, b: number) => ({ a, b, method: 'exact' as const });

describe('The growth that settles a near-normal measure', () => {
  it.each([
    [0.12, 0.03, 0.1],
    [0.1, 0.03, 0.1],
    [5, 0.2, 5.25],
  ])('does so in 95 of 100 campaigns: mean %f, sd %f, limit %f', (mean, sd, limit) => {
    const growth = growthToSettle(mean, sd, limit, CREDIBILITY)!;
    const settled = (g: number): number => {
      const stream = streamOf(1, PURPOSE.test, 7, 0);
      let count = 0;
      for (let i = 0; i < SIMULATED; i++) {
        // Truth from the posterior, then (g - 1) times as much data as there was, and the two combined.
        const truth = mean + sd * stream.normal();
        const more = truth + (sd / Math.sqrt(g - 1)) * stream.normal();
        const later = (mean + (g - 1) * more) / g;
        const beyond = normalCdf((later - limit) / (sd / Math.sqrt(g)));
        if (beyond >= CREDIBILITY || beyond <= 1 - CREDIBILITY) count++;
      }
      return count / SIMULATED;
    };
    expect(Math.abs(settled(growth) - ASSURANCE)).toBeLessThan(within(ASSURANCE));
    expect(settled(growth / 3)).toBeLessThan(ASSURANCE - within(ASSURANCE));
  });

  it('is 1 where it is settled already, and none where the mean is known to lie at the limit', () => {
    expect(growthToSettle(0.3, 0.01, 0.1, CREDIBILITY)).toBe(1);
    expect(growthToSettle(0.1, 1e-9, 0.1, CREDIBILITY)).toBeLessThan(MOST_GROWTH);
  });
});

describe('Entries that settle a share', () => {
  it.each([
    [exact(6, 4), 0.5],
    [exact(2.5, 40.5), 0.05],
    [exact(0.5, 20), 0.05],
    [exact(60.5, 50.5), 0.5],
  ])('do so in 95 of 100 campaigns drawn from the posterior itself: %j at %f', (marginal, limit) => {
    const entries = entriesToSettle(marginal, limit, CREDIBILITY)!;
    const settled = (n: number): number => {
      const stream = streamOf(2, PURPOSE.test, 8, 0);
      let count = 0;
      for (let i = 0; i < SIMULATED; i++) {
        const hits = binomialVariate(stream, n, betaVariate(stream, marginal));
        const below = betaCdf(limit, marginal.a + hits, marginal.b + n - hits);
        if (below >= CREDIBILITY || below <= 1 - CREDIBILITY) count++;
      }
      return count / SIMULATED;
    };
    // The least number that the search finds can lie a jump of the discrete hits above the assurance.
    expect(settled(entries)).toBeGreaterThan(ASSURANCE - within(ASSURANCE) - 0.005);
    expect(settled(Math.ceil(entries / 3))).toBeLessThan(ASSURANCE);
  });

  it('are counted with probabilities within 0.025 of the exact Beta-binomial, however few', () => {
    for (const [a, b, limit, n] of [
      [6, 4, 0.5, 25],
      [2.5, 40.5, 0.05, 60],
      [0.5, 20, 0.05, 40],
      [30, 12, 0.6, 400],
    ] as const) {
      let settled = 0;
      let mass = 1;
      for (let i = 0; i < n; i++) mass *= (b + i) / (a + b + i);
      for (let hits = 0; hits <= n; hits++) {
        const below = betaCdf(limit, a + hits, b + n - hits);
        if (below >= CREDIBILITY || below <= 1 - CREDIBILITY) settled += mass;
        mass *= ((n - hits) / (hits + 1)) * ((a + hits) / (b + n - hits - 1));
      }
      expect(Math.abs(settledShare(exact(a, b), limit, CREDIBILITY, n) - settled)).toBeLessThan(0.025);
    }
  });

  it('are one where the answer is certain', () => {
    expect(entriesToSettle(exact(0, 3), 0.5, CREDIBILITY)).toBe(1);
    expect(entriesToSettle(exact(2, 3), 1, CREDIBILITY)).toBe(1);
  });
});
