import { readFileSync, writeFileSync } from 'node:fs';
import { join, resolve } from 'node:path';
import { DuckDBInstance } from '@duckdb/node-api';
import { op, table } from 'arquero';
import { afterAll, describe, expect, it } from 'vitest';
import { readNpy } from '../../src/handover/npy';
import { entasis, ownFolder } from './entasis';

/**
 * Open data of the registry, package vega-datasets 3.2.1 (BSD-3-Clause), tallied end to end and counted again by
 * libraries that have nothing to do with Entasis: arquero and DuckDB.
 */
const DATA = resolve('node_modules/vega-datasets/data');
const folder = ownFolder();
afterAll(folder.remove);

const build = async (name: string, study: object): Promise<{ counts: number[][]; manifest: any }> => {
  writeFileSync(
    folder.path(`${name}.study.json`),
    JSON.stringify({ schema: 'entasis.study/1', ensemble: { replicas: 10 }, ...study }),
  );
  const bundle = folder.path(`${name}.bundle`);
  const { status, err } = await entasis('build', folder.path(`${name}.study.json`), '--out', bundle);
  expect(status, err).toBe(0);
  const manifest = JSON.parse(readFileSync(join(bundle, 'manifest.json'), 'utf8'));
  const { values, shape } = readNpy(join(bundle, 'tally/counts.npy'));
  const counts = Array.from({ length: shape[0]! }, (_, j) => [...values.subarray(j * shape[1]!, (j + 1) * shape[1]!)]);
  return { counts, manifest };
};
const json = (name: string): Record<string, any>[] => JSON.parse(readFileSync(join(DATA, name), 'utf8'));
/** Place on an axis by definition: edges at or below the value. */
const place = (edges: number[], x: number): number => edges.filter((edge) => x >= edge).length;

describe('open data', () => {
  it('films rated by critics and by the public: NDJSON with missing values, counted by arquero', async () => {
    const films = json('movies.json');
    writeFileSync(folder.path('films.ndjson'), films.map((film) => JSON.stringify(film)).join('\n'));
    const trueEdges = [10, 25, 40, 55, 70, 85, 95];
    const recoEdges = [3, 4.5, 5.5, 6.1, 6.9, 7.8];
    const { counts, manifest } = await build('films', {
      events: { files: ['films.ndjson'] },
      roles: { true: 'Rotten Tomatoes Rating', reconstructed: 'IMDB Rating' },
      axes: { true: { edges: trueEdges }, reconstructed: { edges: recoEdges } },
    });
    const rated = films.filter((film) => film['Rotten Tomatoes Rating'] !== null);
    const expected = counts.map((row) => row.map(() => 0));
    table({
      j: rated.map((film) => place(trueEdges, film['Rotten Tomatoes Rating'])),
      k: rated.map((film) =>
        film['IMDB Rating'] === null ? recoEdges.length + 1 : place(recoEdges, film['IMDB Rating']),
      ),
    })
      .groupby('j', 'k')
      .rollup({ n: op.count() })
      .objects()
      .forEach((row) => {
        const { j, k, n } = row as { j: number; k: number; n: number };
        expected[j]![k] = n;
      });
    expect(counts).toEqual(expected);
    expect(manifest.ledger).toMatchObject({
      read: films.length,
      tallied: rated.length,
      reasons: { 'no true value': films.length - rated.length },
    });
  });

  it('three million flights in Parquet, with cuts on a text column, counted by DuckDB', async () => {
    const parquet = join(DATA, 'flights-3m.parquet');
    const trueEdges = [100, 250, 500, 1000, 2500];
    const recoEdges = [-20, -5, 0, 15, 60, 240];
    const { counts, manifest } = await build('flights', {
      events: { files: [parquet] },
      roles: { true: 'distance', reconstructed: 'delay' },
      axes: { true: { edges: trueEdges }, reconstructed: { edges: recoEdges } },
      cuts: [{ column: 'origin', is: 'in', value: ['ATL', 'ORD', 'DEN'] }],
    });
    const connection = await (await DuckDBInstance.create(':memory:')).connect();
    const sql = (column: string, edges: number[]): string =>
      edges.map((edge) => `(${column} >= ${edge})::int`).join(' + ');
    const found = await connection.runAndReadAll(
      `select ${sql('distance', trueEdges)} as j, case when delay is null then ${recoEdges.length + 1} else ${sql('delay', recoEdges)} end as k,
       count(*)::int as n from '${parquet}' where origin in ('ATL', 'ORD', 'DEN') group by all`,
    );
    const expected = counts.map((row) => row.map(() => 0));
    for (const [j, k, n] of found.getRowsJson() as number[][]) expected[j!]![k!] = n!;
    expect(counts).toEqual(expected);
    expect(manifest.ledger.read).toBe(3_000_000);
  });

  it('penguins by species: a tag axis makes one template a class, counted by hand', async () => {
    const penguins = json('penguins.json');
    const lines = penguins.map((bird) => `${bird['Species']}\t${bird['Flipper Length (mm)'] ?? ''}`);
    writeFileSync(folder.path('penguins.tsv'), ['species\tflipper', ...lines, ''].join('\n'));
    const edges = [175, 185, 195, 205, 215, 230];
    const tags = ['Adelie', 'Chinstrap', 'Gentoo'];
    const { counts, manifest } = await build('penguins', {
      events: { files: ['penguins.tsv'] },
      roles: { true: 'species', reconstructed: 'flipper' },
      axes: { true: { label: 'Species', tags }, reconstructed: { label: 'Flipper length', unit: 'mm', edges } },
    });
    const expected = tags.map((tag) => {
      const birds = penguins.filter((bird) => bird['Species'] === tag);
      const of = (k: number): number =>
        birds.filter(
          (bird) =>
            (bird['Flipper Length (mm)'] === null ? edges.length + 1 : place(edges, bird['Flipper Length (mm)'])) === k,
        ).length;
      return Array.from({ length: edges.length + 2 }, (_, k) => of(k));
    });
    expect(counts).toEqual(expected);
    expect(manifest.columns).toEqual(tags);
  });
});
