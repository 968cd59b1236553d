import { readFileSync } from 'node:fs';
import { describe, expect, it } from 'vitest';
import { multinomialInto } from '../../../src/numerics/multinomial-variate';
import { PURPOSE, streamOf } from '../../../src/numerics/random';
import type { ReferenceSpectrum } from '../../../src/audit/reference';
import { referenceOf } from '../../../src/audit/reference';
import { slopeBiasOf, type ColumnSlope } from '../../../src/audit/slope-bias';
import { namesOf, overHalves, tallyOf } from './invented-campaign';
import { inputOf, studyOf } from './invented-study';

interface Slope {
  calibration: number;
  outcome: number;
  bias: number;
  sd: number;
  ratio: number;
  lower: number;
  upper: number;
  probability: number;
}
interface Made {
  reference: number[];
  halves: number[][][];
  weights: number[][][];
  squares: number[][][];
  plain: Slope[];
  weighted: Slope[];
  predicted: { differences: number[] }[];
}
const made = JSON.parse(
  readFileSync(new URL('../../reference/slope-bias/values.json', import.meta.url), 'utf8'),
) as Made;

const BINS = 4;
const OUTCOMES = 10;
/** Outer columns, empty here, about the ones of the script. */
const framed = (halves: number[][][]): number[][][] => {
  const empty = [0, 1].map(() => new Array<number>(OUTCOMES + 3).fill(0));
  return [empty, ...halves, empty];
};
const frame = { columnNames: namesOf(BINS), outcomeNames: namesOf(OUTCOMES, true) };
const halves = framed(made.halves);
const plain = tallyOf({ ...frame, events: overHalves(halves), halves });
const halvesWeights = framed(made.weights);
const halvesSquares = framed(made.squares);
const weighted = tallyOf({
  ...frame,
  events: overHalves(halves),
  weights: overHalves(halvesWeights),
  squares: overHalves(halvesSquares),
  halves,
  halvesWeights,
  halvesSquares,
});
const steep: ReferenceSpectrum = {
  contents: new Float64Array(BINS + 2).fill(100),
  lowerShares: Float64Array.of(1, ...made.reference, 1),
  description: 'steep',
  range: null,
};
const study = studyOf(BINS, OUTCOMES);

describe('Slope bias (NumPy, tests/reference/slope-bias)', () => {
  it.each([
    ['unit weights', plain, made.plain],
    ['unequal weights', weighted, made.weighted],
  ])('with %s has the cell, bias, sd, interval and probability of independent draws', (_, tally, expected) => {
    const { columns } = slopeBiasOf(inputOf(study, tally), steep);
    expected.forEach((slope, j) => {
      const found = columns[j + 1] as ColumnSlope;
      expect(found.outcome).toBe(frame.outcomeNames[slope.outcome]);
      expect(found.calibration).toBeCloseTo(slope.calibration, 12);
      // The script's mean and sd are of 400,000 draws: their standard errors.
      const error = slope.sd / Math.sqrt(400_000);
      expect(Math.abs(found.bias - slope.bias)).toBeLessThan(5 * error);
      expect(Math.abs(found.sd / slope.sd - 1)).toBeLessThan(5 / Math.sqrt(800_000));
      // Ends of 1,000 draws: 5 standard errors of a 2.5 % quantile are 0.42 of a near-normal sd.
      const end = 0.42 * ((slope.upper - slope.lower) / 3.92);
      expect(Math.abs(found.lower - slope.lower)).toBeLessThan(end);
      expect(Math.abs(found.upper - slope.upper)).toBeLessThan(end);
      expect(Math.abs(found.probability - slope.probability)).toBeLessThan(5 * Math.sqrt(0.25 / 1000));
    });
  });

  it('is found with the size that the injected dependence predicts, where the statistics allow', () => {
    const { columns, flags } = slopeBiasOf(inputOf(study, plain), steep);
    const found = columns[1] as ColumnSlope;
    const k = frame.outcomeNames.indexOf(found.outcome);
    // Cells 1 to OUTCOMES are the bins of the script's prediction.
    const predicted = (found.reference - found.calibration) * made.predicted[0]!.differences[k - 1]!;
    // The spread of the difference of the halves, in the bias: the same 2 |g - f| sd; three of them.
    expect(Math.abs(found.bias - predicted)).toBeLessThan(3 * 2 * 0.0816 * found.sd);
    expect(flags.map(({ state }) => state)).toEqual(['flagged', 'clear', 'clear', 'clear']);
    expect(flags[0]!.advice).toContain('narrower bins');
  });
});

describe('Slope bias in odd studies', () => {
  it("is exactly 0 and clear under the calibration's own spectrum", () => {
    const input = inputOf(study, plain);
    const own = referenceOf({ kind: 'calibration', events: 1000 }, input.trueAxis, plain);
    const { flags, measure } = slopeBiasOf(input, own);
    expect(flags.map(({ value, state }) => [value, state])).toEqual(new Array(4).fill([0, 'clear']));
    expect(measure).toMatchObject({ value: [null, 0, 0, 0, 0, null] });
  });

  it('is absent on a tag axis', () => {
    const tags = inputOf(
      studyOf(2, 2, { axes: { true: { tags: ['a', 'b'] }, reconstructed: { tags: ['x'] } } }),
      plain,
    );
    expect(slopeBiasOf(tags, steep).measure).toEqual({ value: null, reason: 'a tag has no halves' });
  });

  it('is absent without events, and undecided where one half has none', () => {
    const one = tallyOf({
      columnNames: namesOf(2),
      outcomeNames: namesOf(1),
      events: [
        [0, 0, 0],
        [0, 5, 0],
        [0, 0, 0],
        [0, 0, 0],
      ],
    });
    const { columns, flags } = slopeBiasOf(inputOf(studyOf(2, 1), one), {
      ...steep,
      contents: new Float64Array(4).fill(1),
    });
    expect(columns[1]).toEqual({ reason: 'all events in one half of the bin: its slope cannot be seen' });
    expect(columns[2]).toEqual({ reason: 'no events' });
    expect(flags).toHaveLength(1);
    expect(flags[0]).toMatchObject({ column: 'b1', state: 'undecided', value: null, probability: null });
  });

  it('over halves that do not differ is flagged in 5 % of columns or less, thin or full, under a steep reference', () => {
    const COLUMNS = 400;
    const shares = Float64Array.from({ length: OUTCOMES }, (_, k) => Math.exp(-((k - 4) ** 2) / 4));
    const stream = streamOf(5, PURPOSE.test, 0, 0);
    const alike = Array.from({ length: COLUMNS }, (_, j) =>
      [0, 1].map(() => {
        const row = new Float64Array(OUTCOMES);
        multinomialInto(stream, j % 2 === 0 ? 30 : 3000, shares, row);
        return [0, ...row, 0];
      }),
    );
    const empty = [0, 1].map(() => new Array<number>(OUTCOMES + 2).fill(0));
    const both = [empty, ...alike, empty];
    const tally = tallyOf({
      columnNames: namesOf(COLUMNS),
      outcomeNames: namesOf(OUTCOMES),
      events: overHalves(both),
      halves: both,
    });
    const reference = {
      ...steep,
      contents: new Float64Array(COLUMNS + 2).fill(1),
      lowerShares: new Float64Array(COLUMNS + 2).fill(0.75),
    };
    const { flags } = slopeBiasOf(inputOf(studyOf(COLUMNS, OUTCOMES), tally), reference);
    const share = flags.filter(({ state }) => state === 'flagged').length / COLUMNS;
    expect(share).toBeLessThan(0.05 + 3 * Math.sqrt((0.05 * 0.95) / COLUMNS));
  });
});
