import { readFileSync } from 'node:fs';
import { describe, expect, it } from 'vitest';
import { RandomStream, streamOf, type Purpose } from '../../../src/numerics/random';
import { threefry4x32 } from '../../../src/numerics/threefry';
import { fillWords, startingState } from '../../../src/numerics/xoshiro';
import * as ziggurat from '../../../src/numerics/ziggurat';

interface Made {
  threefry: Record<'published' | 'made', { key: number[]; counter: number[]; words: number[] }[]>;
  xoshiro: {
    published: { start: number[]; words: number[] }[];
    made: { start: number[]; words: number[]; thousandth: number }[];
  };
  streams: { seed: number; purpose: Purpose; a: number; b: number; words: number[] }[];
  ziggurat: Record<'normal' | 'exponential', { tail: string; area: string }>;
}
const made = JSON.parse(readFileSync(new URL('../../reference/random/values.json', import.meta.url), 'utf8')) as Made;

const unsigned = (words: Int32Array): number[] => [...words].map((word) => word >>> 0);
const next = (start: readonly number[], count: number): number[] => {
  const words = new Uint32Array(count);
  fillWords(Int32Array.from(start), words, count);
  return [...words];
};

describe('Threefry4x32-20', () => {
  it.each(made.threefry.published)(
    'gives the known answers of its authors (Random123, kat_vectors): $words',
    (known) => {
      expect(unsigned(threefry4x32(known.key, known.counter))).toEqual(known.words);
    },
  );

  it('gives what a second implementation in Python gives for keys and counters as streams use them', () => {
    for (const known of made.threefry.made)
      expect(unsigned(threefry4x32(known.key, known.counter))).toEqual(known.words);
  });
});

describe('xoshiro128++', () => {
  it('gives the first ten words that the C source of its authors gives from 1, 2, 3, 4', () => {
    for (const known of made.xoshiro.published) expect(next(known.start, 10)).toEqual(known.words);
  });

  it('gives the words of a compiled C program, the thousandth too', () => {
    for (const known of made.xoshiro.made) {
      expect(next(known.start, 8)).toEqual(known.words);
      expect(next(known.start, 1000).at(-1)).toBe(known.thousandth);
    }
  });

  it('goes on where it stopped, whatever the sizes of the pieces', () => {
    const stream = new RandomStream(Int32Array.of(1, 2, 3, 4));
    const piece = new Uint32Array(7);
    stream.fill(piece, 7);
    expect([...piece, stream.word(), stream.word(), stream.word()]).toEqual(made.xoshiro.published[0]!.words);
  });

  it('never starts from the state it could not leave, and starts from any other as given', () => {
    expect(startingState(new Int32Array(4)).some((word) => word !== 0)).toBe(true);
    expect([...startingState(Int32Array.of(0, 0, 0, 5))]).toEqual([0, 0, 0, 5]);
    expect(new RandomStream(new Int32Array(4)).uniform()).not.toBe(
      new RandomStream(Int32Array.of(0, 0, 0, 5)).uniform(),
    );
  });
});

describe('The stream of a place', () => {
  it('is xoshiro128++ started by Threefry of seed, purpose and place (made in Python and C)', () => {
    for (const { seed, purpose, a, b, words } of made.streams) {
      const stream = streamOf(seed, purpose, a, b);
      expect(words.map(() => stream.word())).toEqual(words);
    }
  });

  it('differs as soon as seed, purpose, column or block differs, also in their high bits', () => {
    const high = 2 ** 32;
    const places: [number, Purpose, number, number][] = [
      [1, 1, 2, 3],
      [1 + high, 1, 2, 3],
      [1, 2, 2, 3],
      [1, 1, 3, 2],
      [1, 1, 2 + high, 3],
      [1, 1, 2, 3 + high],
    ];
    const firsts = places.map((place) => streamOf(...place).uniform());
    expect(new Set(firsts).size).toBe(places.length);
  });

  it('refuses seeds and places that are no integers from 0 to 2^53 - 1', () => {
    for (const bad of [-1, 0.5, NaN, 2 ** 53]) {
      expect(() => streamOf(bad, 6, 0, 0)).toThrow(RangeError);
      expect(() => streamOf(0, 6, bad, 0)).toThrow(RangeError);
      expect(() => streamOf(0, 6, 0, bad)).toThrow(RangeError);
    }
  });
});

describe('The ziggurat', () => {
  it('has the tails and areas that close 256 layers (mpmath, 40 digits)', () => {
    expect(ziggurat.NORMAL_TAIL).toBe(Number(made.ziggurat.normal.tail));
    expect(ziggurat.NORMAL_AREA).toBe(Number(made.ziggurat.normal.area));
    expect(ziggurat.EXPONENTIAL_TAIL).toBe(Number(made.ziggurat.exponential.tail));
    expect(ziggurat.EXPONENTIAL_AREA).toBe(Number(made.ziggurat.exponential.area));
  });

  it('has layers of one area, the last one closing at the mode within 1e-12', () => {
    for (const [layers, area] of [
      [ziggurat.NORMAL, ziggurat.NORMAL_AREA],
      [ziggurat.EXPONENTIAL, ziggurat.EXPONENTIAL_AREA],
    ] as const) {
      for (let i = 1; i < 256; i++) {
        const above = layers.edge[i]! * (layers.height[i + 1]! - layers.height[i]!);
        expect(Math.abs(above / area - 1)).toBeLessThan(1e-12);
      }
    }
  });
});

describe('Variates drawn many at a time', () => {
  const from = (): RandomStream => streamOf(20261201, 6, 1, 1);
  const COUNT = 20_000;
  const room = new ziggurat.Room(COUNT);

  it('are those drawn one at a time wherever the first two words decide', () => {
    const singles = { normal: from(), half: from(), exponential: from() };
    const many = { normal: new Float64Array(40), half: new Float64Array(40), exponential: new Float64Array(40) };
    ziggurat.fillNormals(from(), many.normal, room);
    ziggurat.fillHalfNormals(from(), many.half, room);
    ziggurat.fillExponentials(from(), many.exponential, room);
    expect([...many.normal.slice(0, 10)]).toEqual(Array.from({ length: 10 }, () => singles.normal.normal()));
    expect([...many.half.slice(0, 10)]).toEqual(Array.from({ length: 10 }, () => singles.half.halfNormal()));
    expect([...many.exponential.slice(0, 10)]).toEqual(
      Array.from({ length: 10 }, () => singles.exponential.exponential()),
    );
  });

  it('leave the sizes of normals as they are and give half of them each sign, within 5 standard errors', () => {
    const normals = new Float64Array(COUNT);
    const halves = new Float64Array(COUNT);
    ziggurat.fillNormals(from(), normals, room);
    ziggurat.fillHalfNormals(from(), halves, room);
    expect(normals.map(Math.abs)).toEqual(halves);
    const positive = normals.filter((x) => x > 0).length;
    expect(Math.abs(positive - COUNT / 2)).toBeLessThan((5 * Math.sqrt(COUNT)) / 2);
  });
});
