import { describe, expect, it } from 'vitest';
import { contentRatio, ratioBelow, ratioInterval } from '../../../src/audit/ratio-of-contents';
import { PURPOSE, streamOf } from '../../../src/numerics/random';

describe('share of one content in the sum of two', () => {
  it('is a Beta where both have the same scale', () => {
    // Gamma(3) and Gamma(7): Beta(3, 7).
    const ratio = contentRatio({ mean: 3, variance: 3 }, { mean: 7, variance: 7 })!;
    expect(ratio).toMatchObject({ value: 0.3, a: 3, b: 7, tilt: 1 });
    expect(ratio.sd).toBeCloseTo(Math.sqrt(0.49 * 3 + 0.09 * 7) / 10, 14);
  });

  it('agrees with simulation at different scales: ends, and the probability of being below a limit', () => {
    const ratio = contentRatio({ mean: 8, variance: 16 }, { mean: 30, variance: 10 })!;
    const stream = streamOf(3, PURPOSE.test, 0, 0);
    const draws = new Float64Array(100_000).map(() => {
      const [x, y] = [2 * stream.gamma(4), stream.gamma(90) / 3];
      return x / (x + y);
    });
    const { lower, upper } = ratioInterval(ratio, 0.9);
    const below = (limit: number): number => draws.filter((x) => x < limit).length / draws.length;
    // Four standard errors of 100 000 draws.
    const error = (p: number): number => 4 * Math.sqrt((p * (1 - p)) / draws.length);
    expect(Math.abs(below(lower) - 0.05)).toBeLessThan(error(0.05));
    expect(Math.abs(below(upper) - 0.95)).toBeLessThan(error(0.05));
    expect(Math.abs(below(0.25) - ratioBelow(ratio, 0.25))).toBeLessThan(error(0.5));
  });

  it('is certain where one content is 0, and nothing where both are', () => {
    const [none, some] = [
      { mean: 0, variance: 0 },
      { mean: 5, variance: 2 },
    ];
    expect(ratioInterval(contentRatio(none, some)!, 0.95)).toEqual({ lower: 0, upper: 0 });
    expect(ratioInterval(contentRatio(some, none)!, 0.95)).toEqual({ lower: 1, upper: 1 });
    expect(ratioBelow(contentRatio(none, some)!, 0.5)).toBe(1);
    expect(ratioBelow(contentRatio(some, none)!, 0.5)).toBe(0);
    expect(ratioBelow(contentRatio(some, none)!, 1)).toBe(0);
    expect(contentRatio(none, none)).toBeNull();
  });

  it('takes a content known to a part in a million for certain, and one known less well as it is', () => {
    const other = { mean: 1, variance: 0.01 };
    expect(contentRatio({ mean: 1, variance: 0 }, other)!.a).toBe(1e12);
    expect(contentRatio({ mean: 1, variance: 0.5e-12 }, other)!.a).toBe(1e12);
    expect(contentRatio({ mean: 1, variance: 2e-12 }, other)!.a).toBeCloseTo(5e11, -2);
    const { lower, upper } = ratioInterval(contentRatio({ mean: 1, variance: 0 }, { mean: 1, variance: 0 })!, 0.95);
    expect(upper - lower).toBeLessThan(1e-5);
  });
});
