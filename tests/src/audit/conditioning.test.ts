import { readFileSync } from 'node:fs';
import { describe, expect, it } from 'vitest';
import type { AuditInput } from '../../../src/audit/audit-input';
import { conditioningWatcher, LARGEST_SIDE, type Conditioning } from '../../../src/audit/conditioning';
import { isAbsent, type ListedMeasure, type Measure } from '../../../src/audit/measure';
import { watchMatrices } from '../../../src/audit/matrix-draws';
import { NORM_TOLERANCE } from '../../../src/numerics/spectral-norm';
import { namesOf, tallyOf } from './invented-campaign';
import { inputOf, sampler, studyOf } from './invented-study';

interface Case {
  name: string;
  counts: number[][];
  singularValues: number[];
  exact: number[] | null;
  noise: number;
  noiseSd: number;
  resolvable: number;
  mean: number[];
  sd: number[];
}
const made = JSON.parse(readFileSync(new URL('../../reference/conditioning/values.json', import.meta.url), 'utf8')) as {
  cases: Case[];
};
const REPLICAS = 1000;

function watched(input: AuditInput, replicas = REPLICAS): Conditioning {
  const watcher = conditioningWatcher(input, replicas);
  watchMatrices(input.posterior, sampler, 1, replicas, [watcher]);
  return watcher.result();
}
function inputWith(counts: number[][]): AuditInput {
  const [bins, outcomes] = [counts.length - 2, counts[0]!.length - 2];
  const tally = tallyOf({ columnNames: namesOf(bins), outcomeNames: namesOf(outcomes), events: counts });
  return inputOf(studyOf(bins, outcomes, { lost: 'unrecorded' }), tally);
}
const listed = (measure: Measure): ListedMeasure => {
  if (isAbsent(measure)) throw new Error(measure.reason);
  return measure;
};

describe.each(made.cases)('Conditioning of a matrix: $name (LAPACK and NumPy, tests/reference/conditioning)', (c) => {
  const found = watched(inputWith(c.counts));
  const values = listed(found.singularValues);

  it('has the singular values of LAPACK', () => {
    expect(values.value).toHaveLength(c.singularValues.length);
    c.singularValues.forEach((value, i) => expect(Math.abs(values.value[i]! - value)).toBeLessThan(1e-13));
  });

  it('has the noise level and the resolvable components of NumPy', () => {
    // Error of a 95 % quantile: 2.1 sd / sqrt(draws), five of them, and the tolerance of the norm.
    const error =
      5 * 2.1 * c.noiseSd * Math.hypot(1 / Math.sqrt(REPLICAS), 1 / Math.sqrt(20_000)) + NORM_TOLERANCE * c.noise;
    expect(Math.abs(found.noise! - c.noise)).toBeLessThan(error);
    expect(listed(found.resolvable).value).toEqual([c.resolvable]);
    const bins = c.counts.length - 2;
    expect(found.flags[0]).toMatchObject({
      id: 'ill-conditioned',
      limit: bins,
      state: c.resolvable < bins ? 'flagged' : 'clear',
    });
  });

  it('has intervals about the mean of the replicas', () => {
    const { intervals } = found.replicas;
    c.mean.forEach((mean, i) => {
      const middle = (values.lower[i]! + values.upper[i]!) / 2;
      const half = (values.upper[i]! - values.lower[i]!) / 2 / 1.959964;
      if (values.lower[i]! > 0) {
        expect(Math.abs(middle - mean)).toBeLessThan(
          5 * c.sd[i]! * Math.hypot(1 / Math.sqrt(intervals), 1 / Math.sqrt(4000)),
        );
        // The sd of an sd of near-normal values is 1 / sqrt(2 n) of it.
        expect(Math.abs(half / c.sd[i]! - 1)).toBeLessThan(5 / Math.sqrt(2 * intervals));
      }
    });
  });
});

describe('Conditioning', () => {
  it('counts the components of the circulant response as its known spectrum says', () => {
    const full = made.cases[0]!;
    expect(full.resolvable).toBe(full.exact!.filter((value) => value > 1e-9).length);
    full.exact!.forEach((value, i) => expect(Math.abs(full.singularValues[i]! - value)).toBeLessThan(1e-4));
  });

  it('says that fewer reconstructed than true bins cannot be told apart, and what more events would bring elsewhere', () => {
    expect(watched(inputWith(made.cases[3]!.counts), 100).flags[0]!.advice).toContain(
      '4 reconstructed bins cannot tell 6 true bins apart',
    );
    const thin = made.cases[1]!.counts.map((row, j) => (j === 1 ? row.map((n, k) => (k === 1 ? n + 100 : n)) : row));
    expect(watched(inputWith(thin), 100).flags[0]!.advice).toMatch(/times the calibration events would resolve all/);
    expect(watched(inputWith(made.cases[2]!.counts), 100).flags[0]).toMatchObject({ state: 'clear', advice: '' });
  });

  it('is absent, with the reason, where a true bin has no posterior or the matrix is too large', () => {
    const counts = [
      [0, 0, 0],
      [0, 0, 0],
      [0, 0, 0],
    ];
    const hollow = inputOf(
      studyOf(1, 1, { lost: 'unrecorded', prior: { pseudoCount: 0 } }),
      tallyOf({ columnNames: namesOf(1), outcomeNames: namesOf(1), events: counts }),
    );
    const reason = 'column b1 has no events and a prior of zero';
    expect(watched(hollow, 10)).toMatchObject({
      resolvable: { value: null, reason },
      singularValues: { reason },
      flags: [],
    });
    const large = conditioningWatcher(
      { ...hollow, study: hollow.study, trueAxis: wideAxis(LARGEST_SIDE + 1) },
      10,
    ).result();
    expect(large.resolvable).toMatchObject({
      value: null,
      reason: 'more than 1000 bins: a decomposition would take minutes',
    });
    const most = conditioningWatcher({ ...hollow, trueAxis: wideAxis(LARGEST_SIDE) }, 10).result();
    expect(most.resolvable).toMatchObject({ value: null, reason });
  });

  it('of a tag axis is that of the whole table of tags', () => {
    const tags = inputOf(
      studyOf(2, 2, { axes: { true: { tags: ['a', 'b'] }, reconstructed: { tags: ['x', 'y'] } }, lost: 'unrecorded' }),
      tallyOf({
        columnNames: ['a', 'b'],
        outcomeNames: ['x', 'y'],
        events: [
          [300, 100],
          [50, 550],
        ],
      }),
    );
    expect(listed(watched(tags, 200).resolvable).value).toEqual([2]);
  });
});

const wideAxis = (bins: number): AuditInput['trueAxis'] => ({
  kind: 'numeric',
  label: '',
  unit: '',
  spacing: 'linear',
  edges: Float64Array.from({ length: bins + 1 }, (_, i) => i),
});
