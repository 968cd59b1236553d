import { describe, expect, it } from 'vitest';
import { gaussLegendre } from '../../../src/numerics/gauss-legendre';

describe('Gauss-Legendre rule', () => {
  it('has the tabulated nodes and weights of 3 points (Abramowitz & Stegun, table 25.4)', () => {
    const { nodes, weights } = gaussLegendre(3);
    [-0.774596669241483, 0, 0.774596669241483].forEach((x, i) => expect(nodes[i]).toBeCloseTo(x, 14));
    [0.555555555555556, 0.888888888888889, 0.555555555555556].forEach((w, i) => expect(weights[i]).toBeCloseTo(w, 14));
  });

  it('is exact for every power up to 2n - 1', () => {
    const { nodes, weights } = gaussLegendre(20);
    for (let power = 0; power < 40; power++) {
      const sum = nodes.reduce((total, x, i) => total + weights[i]! * x ** power, 0);
      expect(sum).toBeCloseTo(power % 2 ? 0 : 2 / (power + 1), 14);
    }
  });
});
