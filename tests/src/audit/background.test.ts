import { describe, expect, it } from 'vitest';
import { auditBackground } from '../../../src/audit/background';
import { parseStudy, resolveAxis } from '../../../src/study/study';
import { tallyPlan } from '../../../src/tally/plan';
import { TallySums } from '../../../src/tally/tally-sums';
import { posteriorOf } from '../../../src/posterior/posterior';
import { priorOf } from '../../../src/posterior/prior';

const backgroundOf = (rows: { r: number; w: number }[], weighted: boolean, unmatched: 'count' | 'reject' = 'count') => {
  const study = parseStudy({
    schema: 'entasis.study/1',
    events: { files: ['a.csv'] },
    roles: { true: 't', reconstructed: 'r', ...(weighted && { weight: 'w' }) },
    unmatched,
    axes: { true: { from: 0, to: 1, bins: 1 }, reconstructed: { from: 0, to: 3, bins: 3 } },
  });
  const sums = new TallySums(tallyPlan(study));
  sums.add(
    {
      rows: rows.length,
      truth: new Float64Array(rows.length).fill(NaN),
      reco: Float64Array.from(rows, ({ r }) => r),
      weight: weighted ? Float64Array.from(rows, ({ w }) => w) : null,
      run: null,
      identity: null,
    },
    [],
  );
  const tally = sums.finish(null);
  const [trueAxis, recoAxis] = [resolveAxis(study.axes.true), resolveAxis(study.axes.reconstructed)];
  const posterior = posteriorOf(tally.cells, priorOf(study.prior, tally, trueAxis, recoAxis));
  return auditBackground({ study, trueAxis, recoAxis, tally, posterior }).bins!.background!;
};
const rows = (r: number, count: number, w = 1) => Array.from({ length: count }, () => ({ r, w }));

describe('the background of rows without a true value', () => {
  it('has the Gamma posterior of a Poisson mean under Jeffreys prior (SciPy 1.10: gamma.ppf([.025, .975], 10.5))', () => {
    const { value, lower, upper } = backgroundOf(rows(0.5, 10), false) as any;
    expect(value[0]).toBe(10.5);
    expect(lower[0]).toBeCloseTo(5.14145, 4);
    expect(upper[0]).toBeCloseTo(17.73944, 4);
  });

  it('shows a limit, and no lower end above zero, where a bin has no event (gamma.ppf(.95, .5) = 1.9207)', () => {
    const { lower, upper } = backgroundOf(rows(0.5, 10), false) as any;
    expect([lower[2], upper[2]]).toEqual([0, expect.closeTo(1.9207, 4)]);
  });

  it('scales with the weights: equal weights of 3 give three times the same', () => {
    const plain = backgroundOf(rows(1.5, 7), false) as any;
    const weighted = backgroundOf(rows(1.5, 7, 3), true) as any;
    for (const end of ['value', 'lower', 'upper']) {
      expect(weighted[end][1]).toBeCloseTo(3 * plain[end][1], 12);
      expect(weighted[end][0]).toBeCloseTo(3 * plain[end][0], 12);
    }
  });

  it('is absent with its reason where the study rejects such rows', () => {
    expect(backgroundOf([], false, 'reject')).toEqual({ value: null, reason: expect.stringContaining('unmatched') });
  });
});
