import { describe, expect, it } from 'vitest';
import { columnMoments, linearMoments, shareCovariances, shareMoments } from '../../../src/posterior/share-moments';
import { PURPOSE, streamOf } from '../../../src/numerics/random';
import { shareQuadrature } from '../../../src/posterior/share-quadrature';
import { fastest } from './fastest';
import reference from '../../reference/share-moments/values.json';

const MEAN_TOLERANCE = 1e-12;
const VARIANCE_TOLERANCE = 1e-10;

function expectRelative(actual: number, expected: number, tolerance: number, what: string): void {
  const off = expected === 0 ? Math.abs(actual) : Math.abs(actual / expected - 1);
  expect(off, `${what}: ${actual} for ${expected}`).toBeLessThan(tolerance);
}

describe('moments of shares (mpmath at 60 digits, tests/reference/share-moments/make.py)', () => {
  for (const { name, ...values } of reference.cases) {
    const shape = Float64Array.from(values.shape);
    const scale = Float64Array.from(values.scale);

    it(`${name}: means and variances of single outcomes`, () => {
      const { mean, variance } = columnMoments(shape, scale);
      mean.forEach((m, k) => {
        expectRelative(m, values.mean[k]!, MEAN_TOLERANCE, `mean ${k}`);
        expectRelative(variance[k]!, values.covariance[k * shape.length + k]!, VARIANCE_TOLERANCE, `variance ${k}`);
      });
    });

    it(`${name}: mean and variance of a sum of outcomes`, () => {
      const { mean, variance } = shareMoments(shape, scale, values.chosen);
      expectRelative(mean, values.chosenMean, MEAN_TOLERANCE, 'mean');
      expectRelative(variance, values.chosenVariance, VARIANCE_TOLERANCE, 'variance');
    });

    it(`${name}: mean and variance of a weighted sum of outcomes`, () => {
      const n = shape.length;
      const factors = shape.map((_, k) => 3 * k - 2);
      const { mean, variance } = linearMoments(shape, scale, factors);
      let expected = 0;
      for (let i = 0; i < n * n; i++) {
        expected += factors[Math.floor(i / n)]! * factors[i % n]! * values.covariance[i]!;
      }
      expectRelative(
        mean,
        values.mean.reduce((sum, m, k) => sum + m * factors[k]!, 0),
        1e-11,
        'mean',
      );
      // The sum over the reference's own covariances, of 16 digits each, loses some: 1e-9 is what it is good for.
      expectRelative(variance, expected, 1e-9, 'variance');
    });

    it(`${name}: covariances between outcomes, relative to the standard deviations`, () => {
      const n = shape.length;
      const covariance = shareCovariances(shape, scale);
      for (let k = 0; k < n; k++) {
        for (let l = 0; l < n; l++) {
          const unit = Math.sqrt(values.covariance[k * n + k]! * values.covariance[l * n + l]!) || 1;
          const off = Math.abs(covariance[k * n + l]! - values.covariance[k * n + l]!) / unit;
          expect(off, `covariance ${k}, ${l}`).toBeLessThan(VARIANCE_TOLERANCE);
        }
      }
    });
  }
});

describe('moments of shares, laws', () => {
  const shape = Float64Array.of(0.5, 3, 10.25, 1);

  it('equal scales give the closed moments of a Dirichlet, whatever the scale', () => {
    const closed = columnMoments(shape, null);
    for (const scale of [1e-9, 1, 7e12]) {
      const { mean, variance } = columnMoments(shape, new Float64Array(4).fill(scale));
      mean.forEach((m, k) => expectRelative(m, closed.mean[k]!, MEAN_TOLERANCE, `mean ${k}`));
      variance.forEach((v, k) => expectRelative(v, closed.variance[k]!, VARIANCE_TOLERANCE, `variance ${k}`));
    }
  });

  it('the Dirichlet form keeps the digits of an outcome that holds all but a part in 1e9', () => {
    const { variance } = columnMoments(Float64Array.of(1e9, 0.5), null);
    expectRelative(variance[0]!, variance[1]!, 1e-14, 'variance');
  });

  it('means sum to one, and each row of covariances to zero', () => {
    const scale = Float64Array.of(1, 40, 0.3, 2);
    const { mean } = columnMoments(shape, scale);
    expectRelative(
      mean.reduce((a, b) => a + b),
      1,
      MEAN_TOLERANCE,
      'sum',
    );
    for (const theta of [scale, null]) {
      const covariance = shareCovariances(shape, theta);
      for (let k = 0; k < 4; k++) {
        const row = covariance.subarray(4 * k, 4 * k + 4);
        expect(Math.abs(row.reduce((a, b) => a + b)) / row[k]!).toBeLessThan(VARIANCE_TOLERANCE);
      }
    }
  });

  it('a weighted sum has the same moments in closed form and by quadrature, and equal factors no variance', () => {
    const factors = Float64Array.of(-3, 0, 1e4, 7);
    const closed = linearMoments(shape, null, factors);
    const byRule = linearMoments(shape, new Float64Array(4).fill(3), factors);
    expectRelative(byRule.mean, closed.mean, MEAN_TOLERANCE, 'mean');
    expectRelative(byRule.variance, closed.variance, VARIANCE_TOLERANCE, 'variance');
    for (const scale of [null, Float64Array.of(1, 40, 0.3, 2)]) {
      const { mean, variance } = linearMoments(shape, scale, new Float64Array(4).fill(5));
      expectRelative(mean, 5, MEAN_TOLERANCE, 'mean');
      expect(variance).toBeLessThan(1e-24);
    }
  });

  it('a sum of all outcomes is 1 with no variance, and a sum of none is 0', () => {
    const scale = Float64Array.of(1, 40, 0.3, 2);
    const all = shareMoments(shape, scale, [0, 1, 2, 3]);
    expectRelative(all.mean, 1, MEAN_TOLERANCE, 'mean');
    expect(all.variance).toBe(0);
    expect(shareMoments(shape, scale, [])).toEqual({ mean: 0, variance: 0 });
  });

  it('a column whose every shape is zero has no moments', () => {
    const none = new Float64Array(3);
    expect(() => columnMoments(none, null)).toThrow(RangeError);
    expect(() => shareMoments(none, Float64Array.of(1, 2, 3), [0])).toThrow(RangeError);
  });

  it('the mass of the rule is one', () => {
    const rule = shareQuadrature(shape, Float64Array.of(1, 40, 0.3, 2));
    const mass = rule.mass.reduce((a, b) => a + b);
    expectRelative(mass, 1, 1e-13, 'mass');
  });

  it('100 weighted columns of 103 outcomes take less than half a second', () => {
    const wide = Float64Array.from({ length: 103 }, (_, k) => 0.5 + (k % 7) * 20);
    const scale = Float64Array.from({ length: 103 }, (_, k) => 0.5 + (k % 5) / 3);
    const work = () => Array.from({ length: 100 }, () => columnMoments(wide, scale));
    expect(fastest(work)).toBeLessThan(500);
  });
});

describe('moments of shares against simulation', () => {
  it('agree with 200 000 normalised draws within 4 standard errors', () => {
    const shape = Float64Array.of(0.5, 3, 10, 0.01);
    const scale = Float64Array.of(1, 2, 0.5, 30);
    const stream = streamOf(11, PURPOSE.test, 0, 0);
    const draws = 200_000;
    const sums = Array.from({ length: 3 }, () => new Float64Array(4));
    const { mean, variance } = columnMoments(shape, scale);
    for (let r = 0; r < draws; r++) {
      const x = shape.map((a, k) => scale[k]! * stream.gamma(a));
      const total = x.reduce((a, b) => a + b);
      x.forEach((value, k) => {
        const off = value / total - mean[k]!;
        [off, off ** 2, off ** 4].forEach((power, i) => (sums[i]![k]! += power / draws));
      });
    }
    shape.forEach((_, k) => {
      expect(Math.abs(sums[0]![k]!)).toBeLessThan(4 * Math.sqrt(variance[k]! / draws));
      const error = Math.sqrt((sums[2]![k]! - sums[1]![k]! ** 2) / draws);
      expect(Math.abs(sums[1]![k]! - variance[k]!)).toBeLessThan(4 * error);
    });
  });
});
