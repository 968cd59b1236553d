import { readFileSync } from 'node:fs';
import { describe, expect, it } from 'vitest';
import { driftOf } from '../../../src/audit/drift';
import { falseDiscoveryAdjusted, homogeneityOf, PROVED, reaches, tailBound, TIE } from '../../../src/audit/homogeneity';
import { multinomialInto } from '../../../src/numerics/multinomial-variate';
import { PURPOSE, streamOf } from '../../../src/numerics/random';
import type { Tally } from '../../../src/tally/tally';
import { tallyOf } from './invented-campaign';
import { inputOf, studyOf } from './invented-study';

interface Made {
  tables: number;
  runs: number[][][];
  columns: {
    gSquared: number;
    freedom: number;
    pValue: number;
    expectedDistance: number;
    distances: number[];
    run: number;
  }[];
  adjusted: { pValues: number[]; values: number[] };
}
const made = JSON.parse(readFileSync(new URL('../../reference/drift/values.json', import.meta.url), 'utf8')) as Made;

const sumOver = (runs: number[][][]): number[][] =>
  runs[0]!.map((row, j) => row.map((_, k) => runs.reduce((sum, run) => sum + run[j]![k]!, 0)));
const names = (letter: string, n: number): string[] => Array.from({ length: n }, (_, i) => `${letter}${i}`);

function campaignOf(runs: number[][][]): Tally {
  const events = sumOver(runs);
  return tallyOf({ columnNames: names('c', events.length), outcomeNames: names('k', events[0]!.length), events, runs });
}
const driftIn = (tally: Tally, limits = {}, seed = 1) =>
  driftOf(inputOf(studyOf(2, 2, { limits, ensemble: { seed } }), tally));

describe('Run drift of the invented campaign (NumPy and SciPy, tests/reference/drift)', () => {
  const drift = driftIn(campaignOf(made.runs));

  it('has the G2, freedom, distances and furthest run that NumPy finds', () => {
    made.columns.forEach((expected, j) => {
      const found = drift.columns[j]!;
      expect(Math.abs(found.gSquared / expected.gSquared - 1)).toBeLessThan(1e-11);
      expect(found.freedom).toBe(expected.freedom);
      expect(found.run).toBe(`run ${expected.run + 1}`);
      expected.distances.forEach((d, r) => expect(Math.abs(found.distances[r]! - d)).toBeLessThan(1e-14));
      expect(found.distance).toBeCloseTo(Math.max(...expected.distances), 14);
    });
  });

  it('has the p-values and the chance distance of an independent bootstrap within 5 standard errors', () => {
    made.columns.forEach(({ pValue, expectedDistance }, j) => {
      const found = drift.columns[j]!;
      if (pValue * made.tables < 20) expect(found.pValue).toBeLessThan(0.01);
      else {
        // Of an inverse-binomial search: relative error 1 / sqrt(exceedances), and that of the peer's binomial.
        const error = pValue * Math.hypot(1 / Math.sqrt(20), Math.sqrt((1 - pValue) / (pValue * made.tables)));
        expect(Math.abs(found.pValue - pValue)).toBeLessThan(5 * error);
      }
      expect(Math.abs(found.expectedDistance / expectedDistance - 1)).toBeLessThan(0.3);
    });
  });

  it('flags the columns that have the statistics to show the injected shift, and no other', () => {
    const flagged = drift.flags.filter(({ state }) => state === 'flagged').map(({ column }) => column);
    expect(flagged).toEqual(['c5', 'c6', 'c7']);
    expect(drift.flags).toHaveLength(10);
    // The thin drifted column is clear, and says that it could not have seen such a shift.
    expect(drift.columns[8]!.detectable).toBeGreaterThan(drift.columns[7]!.distance);
    expect(drift.flags[8]!.evidence).toContain('can pass unseen');
    expect(drift.flags[5]!.advice).toContain('run "run 4"');
  });

  it('gives the injected distance an interval that holds it', () => {
    // A Gaussian of width 0.9 shifted by 0.6 differs by erf(0.6 / (2 sqrt 2 0.9)) = 0.261 from itself; from the pool 5/6 of it.
    for (const j of [5, 6, 7]) {
      const { lower, upper, distance } = drift.columns[j]!;
      expect(lower).toBeLessThan(distance);
      expect(upper).toBeGreaterThan(distance);
      expect(lower).toBeLessThan(0.2175);
      expect(upper).toBeGreaterThan(0.2175);
    }
  });

  it('is the same for the same seed and differs for another', () => {
    expect(driftIn(campaignOf(made.runs)).columns[0]!.pValue).toBe(drift.columns[0]!.pValue);
    expect(driftIn(campaignOf(made.runs), {}, 2).columns[0]!.pValue).not.toBe(drift.columns[0]!.pValue);
  });
});

describe('Benjamini-Hochberg', () => {
  it('agrees with scipy.stats.false_discovery_control', () => {
    const { pValues, values } = made.adjusted;
    falseDiscoveryAdjusted(pValues).forEach((p, i) => expect(p).toBeCloseTo(values[i]!, 15));
  });
});

const CAMPAIGNS = 200;
const RUNS = 5;
const COLUMNS = 12;
const OUTCOMES = 9;

/** Shares of a column, peaked at `j`, with an empty outcome and thin tails. */
const sharesOf = (j: number): Float64Array =>
  Float64Array.from({ length: OUTCOMES }, (_, k) => (k === 8 ? 0 : Math.exp(-((k - (2 * j) / 3) ** 2) / 2)));

function undrifted(seed: number): number[][][] {
  const stream = streamOf(seed, PURPOSE.demonstration, 0, 0);
  return Array.from({ length: RUNS }, (_, r) =>
    Array.from({ length: COLUMNS }, (_, j) => {
      const row = new Float64Array(OUTCOMES);
      multinomialInto(stream, stream.poisson(10 * (j + 1) * (r + 1)), sharesOf(j), row);
      return [...row];
    }),
  );
}

describe('Over 200 undrifted campaigns', () => {
  const drifts = Array.from({ length: CAMPAIGNS }, (_, i) =>
    driftIn(campaignOf(undrifted(i)), { 'run-drift-distance': 0 }, i),
  );

  it('the share with any drift flag agrees with 5 % or less, whatever the distance (3 standard errors)', () => {
    const share = drifts.filter(({ flags }) => flags.some(({ state }) => state === 'flagged')).length / CAMPAIGNS;
    expect(share).toBeLessThan(0.05 + 3 * Math.sqrt((0.05 * 0.95) / CAMPAIGNS));
  });

  it('p-values are uniform in the tail that flags (0.01 and 0.05 within 4 standard errors), and off by a fifth at most at 0.2', () => {
    const p = drifts.flatMap(({ columns }) => columns.map((column) => column!.pValue));
    const below = (level: number): number => p.filter((value) => value <= level).length / p.length;
    expect(Math.abs(below(0.2) / 0.2 - 1)).toBeLessThan(0.2 + 4 * Math.sqrt(0.8 / 0.2 / p.length));
    for (const level of [0.01, 0.05]) {
      const share = below(level);
      expect(Math.abs(share - level)).toBeLessThan(4 * Math.sqrt((level * (1 - level)) / p.length));
    }
  });
});

describe('Over 200 undrifted campaigns of unequal weights', () => {
  const FULLEST = COLUMNS - 1;
  /** Weights of each event exponential of mean 2, apart from run and outcome. */
  function weighted(seed: number): Tally {
    const runs = undrifted(seed).map((run) => [run[FULLEST]!]);
    const stream = streamOf(seed, PURPOSE.demonstration, 1, 0);
    const draw = (n: number): { w: number; v: number } => {
      const weights = Array.from({ length: n }, () => 2 * stream.exponential());
      return { w: weights.reduce((a, b) => a + b, 0), v: weights.reduce((a, b) => a + b * b, 0) };
    };
    const sums = runs.map((run) => run.map((row) => row.map(draw)));
    const runWeights = sums.map((run) => run.map((row) => row.map(({ w }) => w)));
    const runSquares = sums.map((run) => run.map((row) => row.map(({ v }) => v)));
    return tallyOf({
      columnNames: ['c'],
      outcomeNames: names('k', OUTCOMES),
      events: sumOver(runs),
      weights: sumOver(runWeights),
      squares: sumOver(runSquares),
      runs,
      runWeights,
      runSquares,
    });
  }

  it('the share of p-values below 0.05 is 5 % within 3 standard errors', () => {
    const p = Array.from({ length: CAMPAIGNS }, (_, i) => driftIn(weighted(i), {}, i).columns[0]!.pValue);
    const share = p.filter((value) => value <= 0.05).length / CAMPAIGNS;
    expect(Math.abs(share - 0.05)).toBeLessThan(3 * Math.sqrt((0.05 * 0.95) / CAMPAIGNS));
  });
});

describe('A test of homogeneity', () => {
  const table = (groups: number, contents: number[]) => ({
    groups,
    outcomes: contents.length / groups,
    contents: Float64Array.from(contents),
    scale: null,
  });
  const stream = () => streamOf(3, PURPOSE.runDrift, 0, 0);
  const bootstrap = { exceedances: 20, most: 999 };

  it('is absent with fewer than two groups that have content, and certain of one outcome', () => {
    expect(homogeneityOf(table(2, [0, 0, 3, 4]), stream(), bootstrap)).toBeNull();
    expect(homogeneityOf(table(2, [5, 0, 7, 0]), stream(), bootstrap)).toMatchObject({
      gSquared: 0,
      freedom: 0,
      pValue: 1,
    });
  });

  it('of two groups of one event each that differ counts tables tied with the observed one: p = 1/2', () => {
    // Four equally likely tables, of which two are as extreme as this.
    const { pValue } = homogeneityOf(table(2, [1, 0, 0, 1]), stream(), { exceedances: 4_000, most: 9_999 })!;
    expect(Math.abs(pValue - 0.5)).toBeLessThan(5 * Math.sqrt(0.25 / 8_000));
  });

  it('takes values within the rounding of G2 as ties, and no others', () => {
    expect(reaches(7 * (1 - TIE / 2), 7)).toBe(true);
    expect(reaches(7 * (1 - 2 * TIE), 7)).toBe(false);
    // The same table with its groups and outcomes in another order differs by rounding alone.
    const statistic = (contents: number[]): number => homogeneityOf(table(3, contents), stream(), bootstrap)!.gSquared;
    const [one, other] = [statistic([7, 13, 1, 9, 11, 3, 2, 5, 17]), statistic([17, 2, 5, 3, 9, 11, 1, 7, 13])];
    expect(reaches(Math.min(one, other), Math.max(one, other))).toBe(true);
  });

  it('never proves less than the exact tail probability (all tables of two groups of 12 events in three outcomes)', () => {
    const p = [0.5, 0.3, 0.2];
    const all = compositions(12, 3).map((row) => ({ row, mass: multinomialMass(row, p) }));
    for (const t of [8, 12, 16, 20, 30]) {
      let tail = 0;
      for (const a of all) {
        for (const b of all) if (gOfTwo(a.row, b.row) >= t) tail += a.mass * b.mass;
      }
      expect(tailBound(t, 4)).toBeGreaterThanOrEqual(tail);
    }
  });

  it('gives a proved bound beyond any doubt, a drawn p-value short of it', () => {
    const far = homogeneityOf(table(2, [900, 100, 100, 900]), stream(), bootstrap)!;
    expect(far.pValue).toBeLessThan(PROVED);
    const near = homogeneityOf(table(2, [60, 40, 40, 60]), stream(), bootstrap)!;
    expect(tailBound(near.gSquared, 2)).toBeGreaterThan(PROVED);
    expect(near.pValue).toBeGreaterThan(0.0005);
    expect(near.pValue).toBeLessThan(0.02);
  });
});

describe('Drift in odd studies', () => {
  it('is absent with its reason where no run is read, and in a column with a single run', () => {
    const none = tallyOf({ columnNames: ['c'], outcomeNames: ['k'], events: [[3]] });
    expect(driftIn(none).measure).toEqual({ value: null, reason: 'no run is read (roles.run)' });
    const one = driftIn(
      campaignOf([
        [
          [3, 4],
          [0, 0],
        ],
        [
          [5, 1],
          [2, 2],
        ],
      ]),
    );
    expect(one.columns[1]).toBeNull();
    expect(one.measure).toMatchObject({ absent: [{ place: 'c1', reason: 'fewer than two runs have events here' }] });
    expect(one.flags).toHaveLength(1);
  });

  it('takes weights that are not positive as no content, and never gives NaN', () => {
    const runs = [[[4, 2, 0]], [[3, 2, 1]]];
    const runWeights = [[[4e9, -2, 0]], [[3, 2, 1e-9]]];
    const runSquares = [[[9e18, 2, 0]], [[3, 2, 1e-18]]];
    const tally = tallyOf({
      columnNames: ['c'],
      outcomeNames: names('k', 3),
      events: sumOver(runs),
      weights: sumOver(runWeights),
      squares: sumOver(runSquares),
      runs,
      runWeights,
      runSquares,
    });
    const drift = driftIn(tally);
    const numbers = Object.values(drift.columns[0]!)
      .flat()
      .filter((x) => typeof x === 'number');
    expect(numbers.every(Number.isFinite)).toBe(true);
  });
});

function compositions(total: number, parts: number): number[][] {
  if (parts === 1) return [[total]];
  return Array.from({ length: total + 1 }, (_, n) =>
    compositions(total - n, parts - 1).map((rest) => [n, ...rest]),
  ).flat();
}

function multinomialMass(row: number[], p: number[]): number {
  let mass = 1;
  let used = 0;
  row.forEach((n, k) => {
    for (let i = 1; i <= n; i++) mass *= (++used / i) * p[k]!;
  });
  return mass;
}

function gOfTwo(a: number[], b: number[]): number {
  let g = 0;
  a.forEach((n, k) => {
    const half = (n + b[k]!) / 2;
    for (const m of [n, b[k]!]) if (m > 0) g += 2 * m * Math.log(m / half);
  });
  return g;
}
