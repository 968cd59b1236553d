import { describe, expect, it } from 'vitest';
import type { AuditInput } from '../../../src/audit/audit-input';
import { auditBias } from '../../../src/audit/bias';
import type { ListedMeasure, Measure } from '../../../src/audit/measure';
import { auditNonMonotone } from '../../../src/audit/non-monotone';
import { auditPurity } from '../../../src/audit/purity';
import { watchMatrices } from '../../../src/audit/matrix-draws';
import { centralHalfWidth, resolutionWatcher } from '../../../src/audit/resolution';
import { auditStability } from '../../../src/audit/stability';
import type { StudyInput } from '../../../src/study/study';
import reference from '../../reference/window-measures/values.json';
import { inputOf, sampler } from './audited';

const axis = { unit: 'MeV', from: 0, to: 8, bins: 8 };
const axes: StudyInput['axes'] = { true: axis, reconstructed: axis };
const spectrum = {
  contents: Float64Array.from(reference.spectrum),
  lowerShares: new Float64Array(10).fill(0.5),
  description: 'made',
  range: null,
};
const { events, weights, squares } = reference;
const CASES = [
  ['unweighted', inputOf({ events }, { axes }), reference.unweighted],
  ['weighted', inputOf({ events, weights, squares }, { axes }), reference.weighted],
] as const;

/** The replicas that an audit looks at, ten times over, for ends that are good to a few parts in a hundred. */
const REPLICAS = 4000;

function auditResolution(input: AuditInput, replicas = REPLICAS) {
  const watcher = resolutionWatcher(input, replicas);
  watchMatrices(input.posterior, sampler, 1, replicas, [watcher]);
  return watcher.result();
}

/** Largest error of a value and of an interval's ends, in half-widths of the interval. */
function expectClose(measure: Measure, expected: number[][], value: number, ends: number): void {
  const listed = measure as ListedMeasure;
  expected.forEach(([v, lower, upper], i) => {
    const half = (upper! - lower!) / 2;
    const off = (actual: number | null | undefined, wanted: number) => Math.abs(actual! - wanted) / half;
    expect(off(listed.value[i + 1], v!), `value ${i}`).toBeLessThan(value);
    expect(off(listed.lower[i + 1], lower!), `lower end ${i}: ${listed.lower[i + 1]} for ${lower}`).toBeLessThan(ends);
    expect(off(listed.upper[i + 1], upper!), `upper end ${i}: ${listed.upper[i + 1]} for ${upper}`).toBeLessThan(ends);
  });
  for (const outer of [0, 9]) expect(listed.value[outer]).toBeNull();
  expect(listed.absent.map(({ place }) => place)).toEqual(['below', 'above']);
}

describe('measures of the window (numpy and SciPy, tests/reference/window-measures/make.py)', () => {
  for (const [name, input, expected] of CASES) {
    // Weighted reference values are averages of 200 000 draws: good to 0.01 of a half-width.
    const value = name === 'weighted' ? 0.01 : 1e-9;

    it(`${name}: stability`, () => {
      const { stability } = auditStability(input).columns!;
      expectClose(stability!, expected.stability, value, name === 'weighted' ? 0.05 : 1e-8);
    });

    it(`${name}: purity`, () => {
      const { purity } = auditPurity(input, spectrum).columns!;
      // Gammas of the right mean and variance, not the draws' own law: columns of 5 and of 60 events show it.
      expectClose(purity!, expected.purity, value, 0.25);
    });

    it(`${name}: bias`, () => {
      const { bias } = auditBias(input).columns!;
      expectClose(bias!, expected.bias, value, 0.15);
    });

    it(`${name}: resolution`, () => {
      const { resolution } = auditResolution(input).columns!;
      expectClose(resolution!, expected.resolution, name === 'weighted' ? 0.02 : 1e-9, 0.15);
    });

    it(`${name}: steps of the mean reconstructed value and the probability that they lead down`, () => {
      const { flags } = auditNonMonotone(input);
      expect(flags.map(({ column }) => column)).toEqual(input.tally.columnNames.slice(2, 9));
      expected.step.forEach(([v, lower, upper, below], i) => {
        const flag = flags[i]!;
        const half = (upper! - lower!) / 2;
        expect(Math.abs(flag.value! - v!) / half, `step ${i}`).toBeLessThan(0.01);
        // A step is normal but for columns of a few events.
        expect(Math.abs(flag.probability! - below!)).toBeLessThan(0.06);
        expect(Math.abs(flag.upper! - flag.lower! - 2 * half) / (2 * half)).toBeLessThan(0.1);
      });
    });
  }
});

describe('where measures of the window have no meaning', () => {
  const rows = (columns: number, outcomes: number) =>
    Array.from({ length: columns }, (_, j) => Array.from({ length: outcomes }, (_, k) => (j === k ? 90 : 5)));
  const all = (input: AuditInput) => ({
    ...auditStability(input).columns,
    ...auditPurity(input, { ...spectrum, contents: new Float64Array(input.posterior.columns).fill(10) }).columns,
    ...auditBias(input).columns,
    ...auditResolution(input).columns,
  });
  const reasons = (input: AuditInput) =>
    Object.fromEntries(Object.entries(all(input)).map(([id, m]) => [id, m!.value === null ? m!.reason : 'there']));

  it('axes that differ have no matching bins, but bias and resolution', () => {
    const input = inputOf({ events: rows(10, 8) }, { axes: { true: axis, reconstructed: { ...axis, bins: 5 } } });
    expect(reasons(input)).toEqual({
      stability: 'the two axes differ, so no bin matches a column',
      purity: 'the two axes differ, so no bin matches a column',
      bias: 'there',
      resolution: 'there',
    });
    expect(auditStability(input).flags).toEqual([]);
  });

  it('axes of different units have no difference of values', () => {
    const input = inputOf({ events: rows(10, 11) }, { axes: { true: axis, reconstructed: { ...axis, unit: 'mV' } } });
    expect(reasons(input).bias).toBe('the axes differ in unit (MeV, mV)');
    expect(auditNonMonotone(input).flags).toHaveLength(7);
  });

  it('equal tags have stability and purity, but neither distance nor order', () => {
    const tags = { tags: ['e', 'pi', 'mu'] };
    const input = inputOf({ events: rows(3, 4) }, { axes: { true: tags, reconstructed: tags } });
    expect(reasons(input)).toEqual({
      stability: 'there',
      purity: 'there',
      bias: 'tags have no distance from each other',
      resolution: 'tags have no distance from each other',
    });
    expect(auditNonMonotone(input).flags).toEqual([]);
    expect(auditStability(input).flags.map(({ column }) => column)).toEqual(['e', 'pi', 'mu']);
  });

  it('one reconstructed bin shows neither mean nor width, and one true bin no step', () => {
    const one = { ...axis, bins: 1 };
    const input = inputOf({ events: rows(3, 4) }, { axes: { true: one, reconstructed: one } });
    expect(reasons(input).resolution).toBe('one reconstructed bin shows neither mean nor width');
    expect(auditNonMonotone(input).flags).toEqual([]);
    expect((auditStability(input).columns!.stability as ListedMeasure).value).toEqual([null, 1, null]);
  });

  it('a column without events in the window has neither bias nor resolution, and an undecided step', () => {
    const input = inputOf(
      { events: rows(10, 11).map((row, j) => (j === 4 ? row.map((_, k) => (k === 10 ? 9 : 0)) : row)) },
      { axes },
    );
    const { bias } = auditBias(input).columns!;
    expect((bias as ListedMeasure).absent).toContainEqual({
      place: '[3, 4)',
      reason: 'no events in the reconstructed window',
    });
    const steps = auditNonMonotone(input).flags.filter(({ state }) => state === 'undecided');
    expect(steps.map(({ column }) => column)).toEqual(['[3, 4)', '[4, 5)']);
  });

  it('no measure and no flag holds a NaN under a prior of zero with empty columns', () => {
    const events = rows(10, 11).map((row, j) => (j === 3 ? row.map(() => 0) : row));
    const input = inputOf({ events }, { axes, prior: { pseudoCount: 0 } });
    const purity = auditPurity(input, spectrum);
    expect(purity.columns!.purity).toEqual({
      value: null,
      reason: 'column [2, 3) has content, but no events and a prior of zero',
    });
    const found = [all(input), auditStability(input).flags, auditNonMonotone(input).flags];
    expect(JSON.stringify(found)).not.toMatch(/NaN|Infinity/);
    expect(auditStability(input).flags.find(({ column }) => column === '[2, 3)')).toMatchObject({
      state: 'undecided',
      value: null,
    });
  });

  it('log axes: bias and resolution are relative to the true value', () => {
    const log = { unit: 'MeV', from: 1, to: 256, bins: 8, spacing: 'log' as const };
    const events = rows(10, 11).map((row, j) => row.map((_, k) => (k === j ? 1e6 : 0)));
    const input = inputOf({ events }, { axes: { true: log, reconstructed: log }, prior: { pseudoCount: 1e-6 } });
    const { value } = auditBias(input).columns!.bias as ListedMeasure;
    value.slice(1, 9).forEach((bias) => expect(Math.abs(bias!)).toBeLessThan(1e-8));
    // Bins are octaves: content even in [lo, 2 lo) around the centre lo sqrt 2.
    const resolution = (auditResolution(input).columns!.resolution as ListedMeasure).value;
    resolution.slice(1, 9).forEach((width) => expect(width).toBeCloseTo(0.6826894921370859 / 2 / Math.SQRT2, 6));
  });
});

describe('flags of the window', () => {
  const diagonal = (good: number, bad: number) =>
    Array.from({ length: 10 }, (_, j) => Array.from({ length: 11 }, (_, k) => (j === k ? good : k === 5 ? bad : 0)));

  it('unstable and impure answer by posterior probability, with the events that settle what is undecided', () => {
    const clear = inputOf({ events: diagonal(400, 40) }, { axes });
    expect(auditStability(clear).flags.every(({ state }) => state === 'clear')).toBe(true);
    const flagged = inputOf({ events: diagonal(40, 400) }, { axes });
    expect(auditStability(flagged).flags.filter(({ state }) => state === 'flagged')).toHaveLength(7);
    const near = inputOf({ events: diagonal(56, 50) }, { axes });
    const flag = auditStability(near).flags[0]!;
    expect(flag.state).toBe('undecided');
    expect(flag.advice).toMatch(/about [\d\u202f]+ more events in this column would settle it as (clear|flagged)/);
    const impure = auditPurity(near, spectrum).flags;
    expect(impure.map(({ bin }) => bin)).toEqual(near.tally.outcomeNames.slice(1, 9));
    expect(impure.every(({ column }) => column === null)).toBe(true);
  });

  it('non-monotone: flagged where the response turns back', () => {
    const back = Array.from({ length: 10 }, (_, j) => {
      const centre = j === 6 ? 4 : j;
      return Array.from({ length: 11 }, (_, k) => (k === centre ? 200 : k === centre + 1 ? 20 : 0));
    });
    const { flags } = auditNonMonotone(inputOf({ events: back }, { axes }));
    expect(flags.find(({ column }) => column === '[5, 6)')).toMatchObject({ state: 'flagged', limit: 0 });
    expect(flags.filter(({ state }) => state === 'clear')).toHaveLength(6);
  });
});

describe('central half-width of binned content', () => {
  it('of one even bin is 0.683 of half its width', () => {
    expect(centralHalfWidth(Float64Array.of(0, 3, 0), Float64Array.of(0, 1, 3, 4))).toBeCloseTo(0.6826894921370859, 14);
  });
});
