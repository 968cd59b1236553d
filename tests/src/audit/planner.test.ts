import { describe, expect, it } from 'vitest';
import { auditOf } from '../../../src/audit/audit';
import type { AuditInput } from '../../../src/audit/audit-input';
import type { Flag, FlagId } from '../../../src/audit/flag';
import { influenceWatcher, type Influence } from '../../../src/audit/influence';
import { watchMatrices } from '../../../src/audit/matrix-draws';
import { isAbsent, type ListedMeasure, type Measure } from '../../../src/audit/measure';
import { planCampaign, planEfficiency, planFlag, planMatrixShare, type Plan } from '../../../src/audit/planner';
import type { ReferenceSpectrum } from '../../../src/audit/reference';
import { multinomialInto } from '../../../src/numerics/multinomial-variate';
import { PURPOSE, streamOf, type RandomStream } from '../../../src/numerics/random';
import { namesOf, tallyOf } from './invented-campaign';
import { inputOf, sampler, studyOf } from './invented-study';

const BINS = 3;
const COLUMNS = BINS + 2;
const OUTCOMES = BINS + 3;
const PRIOR = 0.5;

const referenceOf = (contents: number[]): ReferenceSpectrum => ({
  contents: Float64Array.from(contents),
  lowerShares: new Float64Array(contents.length).fill(0.5),
  description: 'invented',
  range: null,
});
const reference = referenceOf([30, 60, 80, 50, 20]);

/** A true matrix from the study's own prior: then the posterior's promises hold exactly. */
function truthFrom(stream: RandomStream): Float64Array[] {
  return Array.from({ length: COLUMNS }, () => {
    const x = new Float64Array(OUTCOMES).map(() => stream.gamma(PRIOR));
    const total = x.reduce((a, b) => a + b, 0);
    return x.map((value) => value / total);
  });
}

/** Events tallied so far and `added` more a column. */
function campaign(
  stream: RandomStream,
  truth: Float64Array[],
  added: ArrayLike<number>,
  before: number[][] | null,
): number[][] {
  const row = new Float64Array(OUTCOMES);
  return truth.map((p, j) => {
    multinomialInto(stream, added[j]!, p, row);
    return [...row].map((n, k) => n + (before?.[j]![k] ?? 0));
  });
}
const inputWith = (events: number[][]): AuditInput =>
  inputOf(studyOf(BINS, BINS), tallyOf({ columnNames: namesOf(BINS), outcomeNames: namesOf(BINS, true), events }));

function influenceOf(input: AuditInput, spectrum = reference, replicas = 200): Influence {
  const watcher = influenceWatcher(input, spectrum, replicas);
  watchMatrices(input.posterior, sampler, 1, replicas, [watcher]);
  return watcher.result();
}
const listed = (measure: Measure): ListedMeasure => {
  if (isAbsent(measure)) throw new Error(measure.reason);
  return measure;
};
const known = (plan: Plan): Float64Array => {
  if (!plan.added) throw new Error(plan.reason);
  return plan.added;
};
const shareOf = (ratio: number | null): number => ratio! / (1 + ratio!);

describe('The plan for a flag', () => {
  it('settles 90 % and more of the undecided flags once the events it asks for are added (simulated)', () => {
    const settled = new Map<FlagId, { asked: number; settled: number }>();
    for (let c = 0; c < 30; c++) {
      const stream = streamOf(c, PURPOSE.test, 20, 0);
      const truth = truthFrom(stream);
      const events = campaign(stream, truth, [15, 40, 60, 30, 25], null);
      const input = inputWith(events);
      const audit = auditOf(input, { reference, sampler });
      for (const flag of audit.flags.filter(({ state }) => state === 'undecided')) {
        const plan = planFlag(input, reference, audit.deep!.influence, flag);
        if (!plan.added) continue;
        const later = inputWith(campaign(stream, truth, plan.added, events));
        const answer = auditOf(later, { reference, sampler }).flags.find((other) => sameFlag(flag, other))!;
        const count = settled.get(flag.id) ?? { asked: 0, settled: 0 };
        count.asked++;
        if (answer.state !== 'undecided') count.settled++;
        settled.set(flag.id, count);
      }
    }
    const all = [...settled.values()].reduce((a, b) => ({ asked: a.asked + b.asked, settled: a.settled + b.settled }));
    expect(all.asked).toBeGreaterThan(150);
    expect(all.settled / all.asked).toBeGreaterThanOrEqual(0.9);
    // Of each kind too, within 3 standard errors of 90 %.
    for (const [, { asked, settled: done }] of settled) {
      expect(done / asked).toBeGreaterThan(0.9 - 3 * Math.sqrt(0.09 / asked));
    }
    expect([...settled.keys()].sort()).toEqual(
      ['feed-in', 'impure', 'lossy', 'matrix-limited', 'non-monotone', 'spill-above', 'spill-below', 'unstable'].sort(),
    );
  });

  it('is refused where the flag is settled or more events of the same kind do not help', () => {
    const input = inputWith(Array.from({ length: COLUMNS }, () => [1, 9, 8, 9, 1, 2]));
    const influence = influenceOf(input);
    const flag = { ...auditOf(input).flags.find(({ id }) => id === 'lossy')!, state: 'undecided' as const };
    expect(planFlag(input, reference, influence, { ...flag, state: 'clear' }).reason).toBe('the flag is clear');
    expect(planFlag(input, reference, influence, { ...flag, id: 'slope-bias' }).reason).toMatch(/do not settle/);
    expect(planFlag(input, reference, influence, { ...flag, value: null, evidence: 'no events' }).reason).toBe(
      'no events',
    );
  });
});

function sameFlag(a: Flag, b: Flag): boolean {
  return a.id === b.id && a.column === b.column && a.bin === b.bin;
}

describe('The plan for a matrix share', () => {
  it('is met in every bin once the events are added, in 95 % of campaigns', () => {
    const target = 0.2;
    const CAMPAIGNS = 60;
    let met = 0;
    for (let c = 0; c < CAMPAIGNS; c++) {
      const stream = streamOf(c, PURPOSE.test, 21, 0);
      const truth = truthFrom(stream);
      const events = campaign(stream, truth, [40, 90, 150, 60, 50], null);
      const input = inputWith(events);
      const added = known(planMatrixShare(input, influenceOf(input), target));
      const after = listed(influenceOf(inputWith(campaign(stream, truth, added, events)), reference, 10).ratio).value;
      if (after.every((ratio) => shareOf(ratio) <= target)) met++;
    }
    expect(met / CAMPAIGNS).toBeGreaterThan(0.95 - 3 * Math.sqrt(0.0475 / CAMPAIGNS));
  });

  it('asks for nothing where it is met, and is refused with the reason where it has no meaning', () => {
    const input = inputWith(Array.from({ length: COLUMNS }, () => [100, 9000, 8000, 9000, 100, 200]));
    const influence = influenceOf(input);
    expect(planMatrixShare(input, influence, 0.5)).toMatchObject({ total: 0, reason: null });
    expect(planMatrixShare(input, influence, 1).reason).toMatch(/between 0 and 1/);
    const none = influenceOf(input, referenceOf([0, 0, 0, 0, 0]));
    expect(planMatrixShare(input, none, 0.5).reason).toBe('the reference spectrum has no content');
    expect(planCampaign(input, none, 100, 'optimal')).toEqual({ reason: 'the reference spectrum has no content' });
  });
});

describe('The plan for an efficiency', () => {
  it('is met in every column that has events once they are added, in 95 % of cases', () => {
    const target = 0.03;
    let met = 0;
    let asked = 0;
    for (let c = 0; c < 40; c++) {
      const stream = streamOf(c, PURPOSE.test, 22, 0);
      const truth = truthFrom(stream);
      const events = campaign(stream, truth, [40, 90, 150, 60, 50], null);
      const added = known(planEfficiency(inputWith(events), target));
      const { shape } = inputWith(campaign(stream, truth, added, events)).posterior;
      for (let j = 0; j < COLUMNS; j++) {
        if (added[j] === 0) continue;
        const column = shape.subarray(j * OUTCOMES, (j + 1) * OUTCOMES);
        const total = column.reduce((a, b) => a + b, 0);
        const e = 1 - column[OUTCOMES - 1]! / total;
        asked++;
        if (Math.sqrt((1 - e) / (e * (total + 1))) <= target) met++;
      }
    }
    expect(asked).toBeGreaterThan(100);
    expect(met / asked).toBeGreaterThan(0.95);
  });

  it('asks nothing of columns without events, and is refused where losses are not recorded', () => {
    const input = inputWith([[0, 0, 0, 0, 0, 0], ...Array.from({ length: COLUMNS - 1 }, () => [1, 9, 8, 9, 1, 2])]);
    expect(known(planEfficiency(input, 0.01))[0]).toBe(0);
    const unrecorded = { ...input, study: { ...input.study, lost: 'unrecorded' as const } };
    expect(planEfficiency(unrecorded, 0.01).reason).toMatch(/losses are not recorded/);
    expect(planEfficiency(input, 0).reason).toMatch(/above 0/);
  });
});

describe('A campaign of more events', () => {
  const stream = streamOf(1, PURPOSE.test, 23, 0);
  const truth = truthFrom(stream);
  const events = campaign(stream, truth, [30, 600, 150, 60, 50], null);
  const input = inputWith(events);
  const influence = influenceOf(input);

  it.each(['measured', 'optimal'] as const)(
    'spread as %s brings what it promises, within the change of the mean matrix',
    (spread) => {
      const plan = planCampaign(input, influence, 20_000, spread);
      if ('reason' in plan) throw new Error(plan.reason);
      expect(plan.added.reduce((a, b) => a + b, 0)).toBe(20_000);
      expect(plan.before).toEqual(listed(influence.ratio).value);
      const scaled = events.map((row, j) => {
        const now = row.reduce((a, b) => a + b, 0);
        // Events that repeat the present means exactly: the closed form must then be met to rounding.
        return row.map((n) => n + (plan.added[j]! * (n + PRIOR)) / (now + PRIOR * OUTCOMES));
      });
      const later = listed(influenceOf(inputWith(scaled), reference, 10).ratio).value;
      plan.after.forEach((ratio, i) => expect(ratio! / later[i]!).toBeCloseTo(1, 10));
    },
  );

  it('spread optimally brings a lower mean ratio than as measured', () => {
    const mean = (spread: 'measured' | 'optimal'): number => {
      const plan = planCampaign(input, influence, 2000, spread);
      return 'reason' in plan ? NaN : plan.after.reduce<number>((sum, ratio) => sum + ratio!, 0);
    };
    expect(mean('optimal')).toBeLessThan(0.95 * mean('measured'));
  });
});
