import { readFileSync, rmSync } from 'node:fs';
import { join } from 'node:path';
import { afterEach, describe, expect, it } from 'vitest';
import { writeNpy } from '../../../src/handover/npy';
import { arrayPath, openBundle, readCells, type Bundle } from '../../../src/handover/open-bundle';
import { writeParameters } from '../../../src/handover/write-parameters';
import { makeBundle } from './make-bundle';
import { hasPython, python } from './python';

interface Dirichlet {
  shape: number[];
  sequential: { a: number[]; b: number[] };
}
interface Parameters {
  schema: string;
  outcomes: string[];
  columns: ({
    name: string;
    distribution: string;
    scale?: number[];
    matched_dirichlet?: Dirichlet;
  } & Partial<Dirichlet>)[];
}

let bundle: Bundle;
afterEach(() => rmSync(bundle.folder, { recursive: true }));

async function written(): Promise<Parameters> {
  const out = join(bundle.folder, 'p.json');
  await writeParameters(bundle, { out });
  return JSON.parse(readFileSync(out, 'utf8')) as Parameters;
}

/** Mean of the shares that a sequential form stands for, by its own recipe. */
function sequentialMeans({ a, b }: { a: number[]; b: number[] }): number[] {
  let left = 1;
  const means = a.map((ak, k) => {
    const z = ak === 0 ? 0 : ak / (ak + b[k]!);
    const share = left * z;
    left *= 1 - z;
    return share;
  });
  return [...means, left];
}

describe('the parameters for samplers', () => {
  it('are the Dirichlet shapes of every column, to the bit, under its name', async () => {
    bundle = openBundle(await makeBundle());
    const { schema, outcomes, columns } = await written();
    expect(schema).toBe('entasis.parameters/1');
    expect(outcomes).toEqual(bundle.outcomes);
    expect(columns.map(({ name }) => name)).toEqual(bundle.columns);
    expect(columns.every(({ distribution }) => distribution === 'dirichlet')).toBe(true);
    expect(columns.flatMap(({ shape }) => shape!)).toEqual([...readCells(bundle, 'posterior/shape')]);
  });

  it('have a sequential form with the same means, zeros of the shape included', async () => {
    bundle = openBundle(await makeBundle());
    for (const { shape, sequential } of (await written()).columns) {
      const total = shape!.reduce((sum, a) => sum + a, 0);
      sequentialMeans(sequential!).forEach((mean, k) => expect(mean).toBeCloseTo(shape![k]! / total, 14));
      expect(sequential!.b.at(-1)).toBe(shape!.at(-1));
    }
  });

  it('of a weighted column are gamma shapes and scales, with a matched Dirichlet under that name alone', async () => {
    bundle = openBundle(await makeBundle({ weighted: true }));
    const { columns } = await written();
    expect(columns.flatMap(({ scale }) => scale!)).toEqual([...readCells(bundle, 'posterior/scale')]);
    for (const { distribution, shape, scale, matched_dirichlet: matched, sequential } of columns) {
      expect(distribution).toBe('normalised gammas');
      expect(sequential).toBeUndefined();
      expect(matched!.shape).not.toEqual(shape);
      expect(scale).toHaveLength(7);
    }
  });

  it('say of a column without posterior that there is none', async () => {
    bundle = openBundle(await makeBundle());
    const shape = readCells(bundle, 'posterior/shape').fill(0, 14, 21);
    await writeNpy(arrayPath(bundle.folder, 'posterior/shape'), '<f8', [5, 7], shape);
    const { columns } = await written();
    expect(columns[2]).toEqual({ name: bundle.columns[2], distribution: 'none' });
  });

  it.skipIf(!hasPython('numpy'))(
    'draw the right shares by the recipe they carry (numpy, 5 standard errors)',
    async () => {
      bundle = openBundle(await makeBundle());
      await written();
      const script = `
import json, sys, numpy as np
rng = np.random.default_rng(7)
n = 20000
worst = 0
for column in json.load(open(sys.argv[1]))["columns"]:
    shape = np.array(column["shape"])
    left, p = np.ones(n), []
    for a, b in zip(column["sequential"]["a"], column["sequential"]["b"]):
        z = np.zeros(n) if a == 0 else np.ones(n) if b == 0 else rng.beta(a, b, n)
        p.append(left * z)
        left = left * (1 - z)
    p = np.array(p + [left])
    total = shape.sum()
    mean, var = shape / total, shape * (total - shape) / total**2 / (total + 1)
    alive = var > 0
    assert (p[~alive] == 0).all()
    worst = max(worst, (abs(p.mean(1) - mean)[alive] / np.sqrt(var[alive] / n)).max())
    # The variance of a sample variance of nearly normal numbers is 2 var^2 / n.
    worst = max(worst, (abs(p.var(1) - var)[alive] / (var[alive] * np.sqrt(2 / n))).max() / 2)
print(json.dumps(worst))`;
      expect(python(script, join(bundle.folder, 'p.json'))).toBeLessThan(5);
    },
  );
});
