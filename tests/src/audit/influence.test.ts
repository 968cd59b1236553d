import { readFileSync } from 'node:fs';
import { describe, expect, it } from 'vitest';
import { feedInWatcher } from '../../../src/audit/feed-in';
import { fold } from '../../../src/audit/folding';
import { influenceWatcher, type Influence } from '../../../src/audit/influence';
import { isAbsent, type ListedMeasure, type Measure } from '../../../src/audit/measure';
import { watchMatrices } from '../../../src/audit/matrix-draws';
import type { AuditInput } from '../../../src/audit/audit-input';
import type { ReferenceSpectrum } from '../../../src/audit/reference';
import { namesOf, tallyOf } from './invented-campaign';
import { inputOf, sampler, studyOf } from './invented-study';

interface Expected {
  folded: number[];
  covariance: number[][];
  feedIn: number[];
  columnShares: number[];
  feedInQuantiles: [number[], number[], number[]];
  feedInBeyond: number[];
  ratioQuantiles: [number[], number[], number[]];
  ratioBeyond: number[];
}
interface Made {
  draws: number;
  contents: number[];
  counts: number[][];
  weights: number[][];
  squares: number[][];
  plain: Expected;
  weighted: Expected;
  pure: number[][];
  analyticFeedIn: number[];
}
const made = JSON.parse(
  readFileSync(new URL('../../reference/influence/values.json', import.meta.url), 'utf8'),
) as Made;

const BINS = 6;
const study = studyOf(4, BINS);
const frame = { columnNames: namesOf(4), outcomeNames: namesOf(BINS, true) };
const plain = inputOf(study, tallyOf({ ...frame, events: made.counts }));
const { counts: events, weights, squares } = made;
const weighted = inputOf(study, tallyOf({ ...frame, events, weights, squares }));
const reference: ReferenceSpectrum = {
  contents: Float64Array.from(made.contents),
  lowerShares: new Float64Array(6).fill(0.5),
  description: 'invented',
  range: null,
};
const REPLICAS = 4000;

function watched(input: AuditInput, spectrum = reference, replicas = REPLICAS) {
  const influence = influenceWatcher(input, spectrum, replicas);
  const feedIn = feedInWatcher(input, spectrum, replicas);
  watchMatrices(input.posterior, sampler, 1, replicas, [influence, feedIn]);
  return { influence: influence.result(), feedIn: feedIn.result() };
}
const listed = (measure: Measure): ListedMeasure => {
  if (isAbsent(measure)) throw new Error(measure.reason);
  return measure;
};

describe.each([
  ['unit weights', plain, made.plain, 1e-12],
  // The script knows the weighted moments from 400,000 draws: 5 standard errors of a variance.
  ['unequal weights', weighted, made.weighted, 5 * Math.sqrt(3 / 400_000)],
] as const)('With %s (NumPy, tests/reference/influence)', (_, input, expected, tolerance) => {
  const { influence, feedIn } = watched(input);
  const ratio = listed(influence.ratio);

  it('the folded spectrum and its covariance from the matrix are those of the closed form', () => {
    expected.folded.forEach((mu, i) => {
      expect(Math.abs(listed(influence.folded).value[i]! / mu - 1)).toBeLessThan(tolerance);
      expect(listed(influence.dataVariance).value[i]).toBe(listed(influence.folded).value[i]);
      const own = Math.sqrt(expected.covariance[i]![i]!);
      expected.covariance[i]!.forEach((c, l) => {
        const scale = own * Math.sqrt(expected.covariance[l]![l]!);
        expect(Math.abs(influence.covariance![i * BINS + l]! - c) / scale).toBeLessThan(tolerance);
      });
      expect(listed(influence.matrixVariance).value[i]).toBe(influence.covariance![i * BINS + i]);
    });
  });

  it("each column's share is ranked, and the contributions sum to the variance", () => {
    const order = [...expected.columnShares.keys()].sort(
      (a, b) => expected.columnShares[b]! - expected.columnShares[a]!,
    );
    expect(influence.ranking.map(({ column }) => column)).toEqual(order.map((j) => frame.columnNames[j]));
    influence.ranking.forEach(({ share }, i) =>
      expect(Math.abs(share - expected.columnShares[order[i]!]!)).toBeLessThan(tolerance),
    );
    for (let i = 0; i < BINS; i++) {
      const sum = made.contents.reduce((all, _s, j) => all + influence.contributions![j * BINS + i]!, 0);
      expect(Math.abs(sum / influence.covariance![i * BINS + i]! - 1)).toBeLessThan(1e-9);
    }
  });

  it('feed-in and the ratio of variances have the intervals and probabilities of independent draws', () => {
    const far = (found: number, value: number, low: number, high: number): number =>
      Math.abs(found - value) / ((high - low) / 3.92);
    // Ends of 4,000 draws: 5 standard errors of a 2.5 % quantile are 0.21 sd, the script's own 0.06.
    const [low, , high] = expected.feedInQuantiles;
    const [lowest, , highest] = expected.ratioQuantiles;
    expected.feedIn.forEach((value, i) => {
      const measure = listed(feedIn.measure);
      expect(Math.abs(measure.value[i]! / value - 1)).toBeLessThan(2 * tolerance);
      expect(far(measure.lower[i]!, low[i]!, low[i]!, high[i]!)).toBeLessThan(0.27);
      expect(far(measure.upper[i]!, high[i]!, low[i]!, high[i]!)).toBeLessThan(0.27);
      expect(far(ratio.lower[i]!, lowest[i]!, lowest[i]!, highest[i]!)).toBeLessThan(0.27);
      expect(far(ratio.upper[i]!, highest[i]!, lowest[i]!, highest[i]!)).toBeLessThan(0.27);
      expect(Math.abs(feedIn.probabilities[i]! - expected.feedInBeyond[i]!)).toBeLessThan(
        5 * Math.sqrt(0.25 / REPLICAS),
      );
      expect(Math.abs(influence.flags[i]!.probability! - expected.ratioBeyond[i]!)).toBeLessThan(
        5 * Math.sqrt(0.25 / REPLICAS),
      );
    });
  });
});

describe('The influence variance', () => {
  it.each([
    ['unit', plain],
    ['unequal', weighted],
  ])(
    'equals the sample variance of the folded spectrum over 20,000 replicas, with %s weights (5 standard errors)',
    (_, input) => {
      const DRAWN = 20_000;
      const window = [1, 2, 3, 4, 5, 6];
      const folded = window.map(() => new Float64Array(DRAWN));
      let r = 0;
      const watch = (matrix: Float64Array): void => {
        fold(reference.contents, matrix, window).forEach((mu, i) => (folded[i]![r] = mu));
        r++;
      };
      watchMatrices(input.posterior, sampler, 3, DRAWN, [{ watch }]);
      const { covariance } = watched(input, reference, 100).influence;
      folded.forEach((values, i) => {
        const mean = values.reduce((a, b) => a + b, 0) / DRAWN;
        const square = (power: number): number => values.reduce((a, x) => a + (x - mean) ** power, 0) / DRAWN;
        const error = Math.sqrt((square(4) - square(2) ** 2) / DRAWN);
        expect(Math.abs(square(2) - covariance![i * BINS + i]!)).toBeLessThan(5 * error);
      });
    },
  );
});

describe('Feed-in', () => {
  it('equals the analytic share of a known response (SciPy) once the events say nothing else', () => {
    const none = inputOf(
      { ...study, prior: { pseudoCount: 0 } },
      tallyOf({
        columnNames: frame.columnNames,
        outcomeNames: namesOf(BINS),
        events: made.pure.map((row) => row.map((p) => 1e6 * p)),
      }),
    );
    const { lost: _lost, ...rest } = { lost: 0, ...none };
    const found = listed(
      watched({ ...rest, study: { ...none.study, lost: 'unrecorded' } }, reference, 100).feedIn.measure,
    );
    made.analyticFeedIn.forEach((share, i) => expect(Math.abs(found.value[i]! / share - 1)).toBeLessThan(1e-12));
  });

  it('has three answers: flagged in the outer bins, clear in the middle, undecided between', () => {
    const states = watched(plain).feedIn.flags.map(({ state }) => state);
    expect(states).toEqual(
      made.plain.feedInBeyond.map((p) => (p >= 0.95 ? 'flagged' : p <= 0.05 ? 'clear' : 'undecided')),
    );
    expect(new Set(states).size).toBeGreaterThan(1);
  });
});

describe('Odd studies', () => {
  const absentIn = (found: { influence: Influence; feedIn: { measure: Measure } }) => [
    found.influence.ratio,
    found.influence.folded,
    found.feedIn.measure,
  ];

  it('a tag axis has no outside, but an influence', () => {
    const tags = inputOf(
      studyOf(2, 2, { axes: { true: { tags: ['a', 'b'] }, reconstructed: { tags: ['x', 'y'] } }, lost: 'unrecorded' }),
      tallyOf({
        columnNames: ['a', 'b'],
        outcomeNames: ['x', 'y'],
        events: [
          [30, 10],
          [5, 55],
        ],
      }),
    );
    const spectrum = { ...reference, contents: Float64Array.of(100, 50) };
    const found = watched(tags, spectrum, 100);
    expect(found.feedIn.measure).toEqual({ value: null, reason: 'a true axis of tags has no outside' });
    expect(listed(found.influence.ratio).value.every((x) => x! > 0)).toBe(true);
  });

  it('a spectrum without content, or in a column without posterior, leaves the measures absent with the reason', () => {
    const empty = watched(plain, { ...reference, contents: new Float64Array(6) }, 32);
    for (const measure of absentIn(empty))
      expect(measure).toEqual({ value: null, reason: 'the reference spectrum has no content' });
    const events = made.counts.map((row, j) => (j === 2 ? row.map(() => 0) : row));
    const hollow = inputOf({ ...study, prior: { pseudoCount: 0 } }, tallyOf({ ...frame, events }));
    const reason = 'column b2 has content, but no events and a prior of zero';
    for (const measure of absentIn(watched(hollow, reference, 32))) expect(measure).toEqual({ value: null, reason });
  });

  it('a bin that nothing reaches is absent alone, with its reason, and one column and one bin suffice', () => {
    const one = inputOf(
      studyOf(1, 2, { prior: { pseudoCount: 0 } }),
      tallyOf({
        columnNames: namesOf(1),
        outcomeNames: namesOf(2, true),
        events: [
          [0, 0, 0, 0, 0],
          [1, 8, 0, 1, 2],
          [0, 0, 0, 0, 0],
        ],
      }),
    );
    const spectrum = { ...reference, contents: Float64Array.of(0, 10, 0) };
    const found = watched(one, spectrum, 100);
    const reason = 'the reference spectrum gives this bin nothing';
    expect(listed(found.influence.ratio).absent).toEqual([{ place: 'b2', reason }]);
    expect(listed(found.feedIn.measure)).toMatchObject({ value: [0, null], lower: [0, null], upper: [0, null] });
    expect(found.influence.flags).toHaveLength(1);
  });

  it('huge weights give finite numbers', () => {
    const huge = made.weights.map((row, j) => row.map((w) => (j === 1 ? w * 1e150 : w)));
    const hugeSquares = made.squares.map((row, j) => row.map((v) => (j === 1 ? v * 1e300 : v)));
    const input = inputOf(study, tallyOf({ ...frame, events, weights: huge, squares: hugeSquares }));
    const found = listed(watched(input, reference, 64).influence.ratio);
    expect([...found.value, ...found.lower, ...found.upper].every(Number.isFinite)).toBe(true);
    expect(found.value[0]).toBeCloseTo(listed(watched(weighted, reference, 64).influence.ratio).value[0]!, 9);
  });
});
