import { readFileSync } from 'node:fs';
import { describe, expect, it } from 'vitest';
import { adaptiveRule, blockReplicas, numericalTolerance, replicasNeeded } from '../../../src/audit/replicas-needed';
import { PURPOSE, streamOf } from '../../../src/numerics/random';
import { namesOf, tallyOf } from './invented-campaign';
import { inputOf, sampler, studyOf } from './invented-study';

interface Made {
  replicas: number;
  credibility: number;
  digits: number;
  outputs: number;
  blocks: number[][];
  history: { blocks: number; excess: number; quantity: string; output: number }[];
}
const made = JSON.parse(
  readFileSync(new URL('../../reference/replicas-needed/values.json', import.meta.url), 'utf8'),
) as Made;

describe('The numerical tolerance', () => {
  it.each([
    // The examples of JCGM 101:2008, 7.9.2 (from memory): 0.000 35 g with two digits, with one digit, and 2 K.
    [0.00035, 2, 0.000005],
    [0.00035, 1, 0.00005],
    [2, 1, 0.5],
    // Rounding up to the next power of ten.
    [0.0996, 2, 0.005],
    [0.0994, 2, 0.0005],
    [0.095000001, 1, 0.05],
    [0.0949, 1, 0.005],
    [0, 2, 0],
  ])('of %f with %i digits is %f', (u, digits, delta) => {
    expect(numericalTolerance(u, digits)).toBeCloseTo(delta, 14);
  });
});

describe('The adaptive rule (plain NumPy, tests/reference/replicas-needed)', () => {
  it('is stable from the same block on, for the same worst quantity', () => {
    const rule = adaptiveRule(made.outputs, { digits: made.digits, credibility: made.credibility });
    made.blocks.forEach((block, h) => {
      rule.add(Float64Array.from(block));
      if (h === 0) return;
      const expected = made.history[h - 1]!;
      const found = rule.stability();
      expect(found).toMatchObject({
        blocks: h + 1,
        replicas: (h + 1) * made.replicas,
        isStable: expected.excess <= 1,
        worst: { output: expected.output, quantity: expected.quantity },
      });
      const needed = Math.max(2, Math.ceil((h + 1) * expected.excess ** 2 * (1 - 1e-9)));
      expect(found.expected).toBe(needed * made.replicas);
    });
    expect(new Set(made.history.map(({ excess }) => excess <= 1)).size).toBe(2);
  });

  it('refuses an answer from one block, and blocks of different lengths', () => {
    const rule = adaptiveRule(2, { digits: 1, credibility: 0.95 });
    rule.add(new Float64Array(8));
    expect(() => rule.stability()).toThrow(/two blocks/);
    expect(() => rule.add(new Float64Array(6))).toThrow(RangeError);
    expect(() => rule.add(new Float64Array(7))).toThrow(RangeError);
  });

  it('is stable at once for quantities that do not vary', () => {
    const rule = adaptiveRule(1, { digits: 2, credibility: 0.95 });
    rule.add(new Float64Array(10).fill(0.3));
    rule.add(new Float64Array(10).fill(0.3));
    expect(rule.stability()).toMatchObject({ isStable: true, expected: 20 });
  });

  it('stops with means that are right to the tolerance in 95 % of trials and more', () => {
    const trials = 100;
    let right = 0;
    for (let t = 0; t < trials; t++) {
      const stream = streamOf(t, PURPOSE.test, 1, 0);
      const rule = adaptiveRule(1, { digits: 1, credibility: 0.9 });
      const sums = { sum: 0, count: 0 };
      do {
        const block = new Float64Array(200).map(() => 5 + 3 * stream.normal());
        block.forEach((x) => ((sums.sum += x), sums.count++));
        rule.add(block);
      } while (sums.count < 400 || !rule.stability().isStable);
      if (Math.abs(sums.sum / sums.count - 5) <= numericalTolerance(3, 1)) right++;
    }
    expect(right).toBeGreaterThanOrEqual(95);
  });
});

describe('Replicas needed', () => {
  const events = [
    [0, 40, 8, 2],
    [3, 200, 90, 7],
    [0, 0, 0, 0],
    [1, 5, 30, 600],
  ];
  const tally = tallyOf({ columnNames: namesOf(2), outcomeNames: namesOf(2), events });
  const input = inputOf(studyOf(2, 2, { lost: 'unrecorded' }), tally);
  const run = (posterior = input.posterior, most = 1e6, digits = 1) => {
    const steps = replicasNeeded(posterior, sampler, 1, { digits, credibility: 0.95 }, most, 2000);
    const shares: number[] = [];
    for (;;) {
      const step = steps.next();
      if (step.done) return { shares, needed: step.value };
      shares.push(step.value);
    }
  };

  it('shows its progress, names the cell that needs most, and is the same for the same seed', () => {
    const { shares, needed } = run();
    expect(shares).toEqual([0.25, 0.5, 0.75, 1]);
    expect(needed).toMatchObject({ isStable: true });
    expect(needed!.replicas % 2000).toBe(0);
    expect(run().needed).toEqual(needed);
  });

  it('more digits need more replicas, and a limit met early gives the number expected', () => {
    const one = run().needed!;
    const two = run(input.posterior, 4000, 2).needed!;
    expect(two.isStable).toBe(false);
    expect(two.replicas).toBeGreaterThan(10 * one.replicas);
  });

  it('passes over columns without posterior', () => {
    const none = inputOf(studyOf(2, 2, { lost: 'unrecorded', prior: { pseudoCount: 0 } }), tally).posterior;
    expect(run(none).needed).not.toBeNull();
    const empty = tallyOf({
      columnNames: namesOf(2),
      outcomeNames: namesOf(2),
      events: events.map((row) => row.map(() => 0)),
    });
    expect(run(inputOf(studyOf(2, 2, { prior: { pseudoCount: 0 } }), empty).posterior).needed).toBeNull();
  });

  it('draws blocks of the length that JCGM 101:2008, 7.9.4 asks for', () => {
    expect([blockReplicas(0.95), blockReplicas(0.9999)]).toEqual([10_000, 1_000_000]);
  });
});
