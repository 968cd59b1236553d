import { describe, expect, it } from 'vitest';
import { priorSensitivityOf } from '../../../src/audit/prior-sensitivity';
import reference from '../../reference/neighbour-prior/values.json';
import { inputOf } from './audited';

describe('prior sensitivity (numpy and SciPy, tests/reference/neighbour-prior/make.py)', () => {
  for (const { name, spacing, trueEdges, recoEdges, events, sensitivity } of reference.cases) {
    const edges = (list: number[]) => ({ unit: 'MeV', edges: list, spacing: spacing as 'linear' | 'log' });
    const axes = { true: edges(trueEdges), reconstructed: edges(recoEdges) };
    const found = priorSensitivityOf(inputOf({ events }, { axes }));

    it(`${name}: means and sds of every cell under the four priors`, () => {
      expect(found.priors.map(({ name }) => name)).toEqual(Object.keys(sensitivity.priors));
      for (const { name, mean, sd } of found.priors) {
        const expected = sensitivity.priors[name as keyof typeof sensitivity.priors];
        // The strength of the neighbour prior is read off a curve, to a part in a hundred.
        const tolerance = name === 'neighbours' ? 0.01 : 1e-12;
        expected.mean.forEach((m, i) => expect(Math.abs(mean[i]! / m - 1)).toBeLessThan(tolerance));
        expected.sd.forEach((s, i) => expect(Math.abs(sd[i]! / s - 1)).toBeLessThan(tolerance));
      }
    });

    it(`${name}: the largest change is named`, () => {
      const { prior, column, outcome, inSd } = sensitivity.largest;
      const input = inputOf({ events }, { axes });
      expect(found.largest).toMatchObject({
        prior,
        column: input.tally.columnNames[column],
        outcome: input.tally.outcomeNames[outcome],
      });
      expect(Math.abs(found.largest!.inSd / inSd - 1)).toBeLessThan(0.01);
    });
  }
});

describe('prior sensitivity, laws', () => {
  const events = [
    [0, 0, 0, 0, 0, 0],
    [0, 9000, 500, 0, 0, 500],
    [0, 1, 2, 1, 0, 0],
    [0, 0, 0, 0, 0, 0],
  ];

  it("the study's own prior changes nothing, and an outcome never seen by sqrt(1/2) of its sd from Jeffreys to flat", () => {
    const { priors, largest } = priorSensitivityOf(inputOf({ events }));
    const [flat, jeffreys] = priors;
    expect([...jeffreys!.change]).toEqual([0, 0, 0, 0]);
    expect(jeffreys!.changed).toEqual([]);
    // From 1/2 to 1 in 10 000 events: a mean of a/A with an sd of sqrt(a)/A.
    expect(flat!.change[1]).toBeCloseTo(Math.SQRT1_2, 2);
    expect(largest!.inSd).toBe(Math.max(...priors.map(({ change }) => Math.max(...change))));
  });

  it('flags that change are named with both answers', () => {
    const { priors } = priorSensitivityOf(
      inputOf({ events: events.map((row, j) => (j === 2 ? [0, 12, 12, 12, 0, 0] : row)) }),
    );
    // 3 pseudo-counts against 36 events are below the limit of 0.1, 6 are not.
    expect(priors[0]!.changed).toContainEqual({
      id: 'prior-led',
      column: '[1, 2)',
      bin: null,
      from: 'clear',
      to: 'flagged',
    });
  });

  it('a column without posterior under the study has no change, and nothing is NaN', () => {
    const found = priorSensitivityOf(inputOf({ events }, { prior: { pseudoCount: 0 } }));
    for (const { change, mean, sd } of found.priors) {
      expect([change[0], change[3]]).toEqual([0, 0]);
      for (const value of [...change, ...mean, ...sd]) expect(Number.isFinite(value)).toBe(true);
    }
  });
});
