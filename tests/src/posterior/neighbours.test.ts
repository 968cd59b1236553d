import { describe, expect, it } from 'vitest';
import { neighbourPrior } from '../../../src/posterior/neighbours';
import { priorOf } from '../../../src/posterior/prior';
import { columnNames, outcomeNames, type Axis } from '../../../src/study/axis';
import { fastest } from './fastest';
import { tallyOf } from '../audit/invented-campaign';
import reference from '../../reference/neighbour-prior/values.json';

function axis(edges: number[], spacing: 'linear' | 'log' = 'linear', unit = 'MeV'): Axis {
  return { kind: 'numeric', label: '', unit, spacing, edges: Float64Array.from(edges) };
}

function tallied(events: number[][], trueAxis: Axis, recoAxis: Axis) {
  const lost = outcomeNames(recoAxis, true).length === events[0]!.length;
  return tallyOf({ columnNames: columnNames(trueAxis), outcomeNames: outcomeNames(recoAxis, lost), events });
}

/** Strengths are read off a grid of eight a decade by a parabola. */
const STRENGTH_TOLERANCE = 0.01;

describe('neighbour prior (numpy and SciPy, tests/reference/neighbour-prior/make.py)', () => {
  for (const expected of reference.cases) {
    const spacing = expected.spacing as 'linear' | 'log';
    const trueAxis = axis(expected.trueEdges, spacing);
    const recoAxis = axis(expected.recoEdges, spacing);
    const found = neighbourPrior(tallied(expected.events, trueAxis, recoAxis), trueAxis, recoAxis);
    const outcomes = expected.events[0]!.length;

    it(`${expected.name}: strengths of all columns and of the whole`, () => {
      expected.strengths.forEach((kappa, j) => {
        if (kappa === 0) expect(found.strengths[j]).toBe(0);
        else expect(Math.abs(found.strengths[j]! / kappa - 1), `column ${j}`).toBeLessThan(STRENGTH_TOLERANCE);
      });
      expect(Math.abs(found.strength! / expected.strength - 1)).toBeLessThan(STRENGTH_TOLERANCE);
    });

    it(`${expected.name}: means of the prior, and Jeffreys where no neighbour informs`, () => {
      expected.prior.forEach((row, j) => {
        const total = row.reduce((a, b) => a + b);
        const mine = found.counts.subarray(j * outcomes, (j + 1) * outcomes);
        const sum = mine.reduce((a, b) => a + b);
        row.forEach((count, k) => expect(Math.abs(mine[k]! / sum / (count / total) - 1)).toBeLessThan(1e-11));
        if (expected.strengths[j] === 0) expect([...mine]).toEqual(row);
      });
    });

    it(`${expected.name}: the evidence curve`, () => {
      expected.curve.kappa.forEach((kappa, i) => {
        const at = found.grid.findIndex((value) => Math.abs(value / kappa - 1) < 1e-9);
        expect(Math.abs(found.logEvidence[at]! / expected.curve.logEvidence[i]! - 1)).toBeLessThan(1e-9);
      });
    });
  }
});

describe('neighbour prior, laws', () => {
  const trueAxis = axis([0, 1, 2, 3, 4, 5, 6]);
  const recoAxis = axis([0, 1, 2, 3, 4, 5, 6]);
  const events = [
    [0, 0, 0, 0, 0, 0, 0, 0],
    [2, 80, 18, 0, 0, 0, 0, 0],
    [0, 30, 200, 40, 0, 0, 0, 0],
    [0, 0, 12, 60, 15, 0, 0, 0],
    [0, 0, 0, 70, 300, 50, 0, 0],
    [0, 0, 0, 0, 20, 90, 30, 0],
    [0, 0, 0, 0, 0, 3, 14, 2],
    [0, 0, 0, 0, 0, 0, 1, 9],
  ];
  const priorWith = (rows: number[][]) => neighbourPrior(tallied(rows, trueAxis, recoAxis), trueAxis, recoAxis);

  it('a column never informs its own prior: whatever is in it, the prior is the same to the bit', () => {
    const before = priorWith(events).counts;
    for (let j = 0; j < events.length; j++) {
      const changed = events.map((row, i) => (i === j ? row.map((n, k) => (n > 0 ? 5 * n + k : n)) : row));
      expect(priorWith(changed).counts.subarray(8 * j, 8 * j + 8)).toEqual(before.subarray(8 * j, 8 * j + 8));
    }
  });

  it('its neighbours do inform it', () => {
    const before = priorWith(events).counts;
    const changed = events.map((row, j) => (j === 4 ? row.map((n) => n * 3) : row));
    expect(priorWith(changed).counts.subarray(24, 32)).not.toEqual(before.subarray(24, 32));
  });

  it('no outcome is impossible, and the total of the prior is the strength', () => {
    const { counts, strengths } = priorWith(events);
    expect(Math.min(...counts)).toBeGreaterThan(0);
    strengths.forEach((kappa, j) => {
      const total = counts.subarray(8 * j, 8 * j + 8).reduce((a, b) => a + b);
      expect(total).toBeCloseTo(kappa === 0 ? 4 : kappa, 8);
    });
  });

  it('outer columns, tags and studies of one or two bins take the prior of Jeffreys', () => {
    const { strengths } = priorWith(events);
    expect([strengths[0], strengths[7]]).toEqual([0, 0]);
    const tags: Axis = { kind: 'tags', label: '', unit: '', tags: ['a', 'b', 'c'] };
    const rows = [
      [5, 1, 1],
      [1, 5, 1],
      [1, 1, 5],
    ];
    const tagged = neighbourPrior(tallied(rows, tags, tags), tags, tags);
    expect([...tagged.counts]).toEqual(new Array(9).fill(0.5));
    expect(tagged.strength).toBeNull();
    expect([...tagged.logEvidence].every((value) => value === 0)).toBe(true);
    for (const bins of [1, 2]) {
      const few = axis([0, 1, 2].slice(0, bins + 1));
      const made = neighbourPrior(tallied(events.slice(0, bins + 2), few, recoAxis), few, recoAxis);
      expect([...made.counts].every((count) => count === 0.5)).toBe(true);
    }
  });

  it('a tally without events has the prior of Jeffreys and no NaN', () => {
    const none = priorWith(events.map((row) => row.map(() => 0)));
    expect([...none.counts].every((count) => count === 0.5)).toBe(true);
    expect(none.strength).toBeNull();
  });

  it('bins that differ in nothing but chance get a strong prior, bins that have nothing in common a weak one', () => {
    const alike = events.map(() => new Array(8).fill(100));
    const unlike = events.map((_, j) => [0, 0, j % 2 ? 900 : 5, j % 2 ? 5 : 900, 0, 0, 0, 0]);
    const reco = axis([0, 1, 2, 3, 4, 5, 6], 'linear', 'counts');
    const strengthOf = (rows: number[][]) => neighbourPrior(tallied(rows, trueAxis, reco), trueAxis, reco).strength!;
    expect(strengthOf(alike)).toBeGreaterThan(100);
    expect(strengthOf(unlike)).toBeLessThan(3);
  });

  it('equal weights give the prior of their events', () => {
    const weighted = tallied(events, trueAxis, recoAxis);
    weighted.cells.weights = weighted.cells.events.map((n) => 0.25 * n);
    weighted.cells.squares = weighted.cells.events.map((n) => 0.0625 * n);
    expect(neighbourPrior(weighted, trueAxis, recoAxis).counts).toEqual(priorWith(events).counts);
  });

  it('100 columns of 103 outcomes take less than a second', () => {
    const wide = axis(Array.from({ length: 99 }, (_, i) => i));
    const far = axis(Array.from({ length: 101 }, (_, i) => i));
    const rows = Array.from({ length: 100 }, (_, j) =>
      Array.from({ length: 103 }, (_, k) => Math.round(900 * Math.exp(-((k - j) ** 2) / 200))),
    );
    const tally = tallied(rows, wide, far);
    expect(fastest(() => neighbourPrior(tally, wide, far))).toBeLessThan(1000);
  });
});

describe('the prior a study asks for', () => {
  const tags: Axis = { kind: 'tags', label: '', unit: '', tags: ['a', 'b'] };
  const tally = tallied(
    [
      [5, 1],
      [1, 5],
    ],
    tags,
    tags,
  );

  it('is a pseudo-count for each outcome, a total shared out, or the neighbours', () => {
    expect([...priorOf({ pseudoCount: 0.5 }, tally, tags, tags).counts]).toEqual([0.5, 0.5, 0.5, 0.5]);
    expect([...priorOf({ pseudoTotal: 1 }, tally, tags, tags).counts]).toEqual([0.5, 0.5, 0.5, 0.5]);
    expect(priorOf({ pseudoTotal: 1 }, tally, tags, tags).neighbours).toBeNull();
    expect(priorOf({ neighbours: {} }, tally, tags, tags).neighbours).not.toBeNull();
  });
});
