import { mkdirSync, mkdtempSync, rmSync, writeFileSync } from 'node:fs';
import { tmpdir } from 'node:os';
import { join } from 'node:path';
import { afterAll, beforeAll, describe, expect, it } from 'vitest';
import { defaultBundleFolder, expandFiles } from '../../../src/study/paths';

let folder: string;
beforeAll(() => {
  folder = mkdtempSync(join(tmpdir(), 'paths-'));
  mkdirSync(join(folder, 'runs'));
  for (const name of ['runs/b.csv', 'runs/a.csv', 'runs/[1].csv', 'c.csv']) writeFileSync(join(folder, name), 'x\n');
});
afterAll(() => rmSync(folder, { recursive: true }));

const names = (patterns: string[]): string[] => expandFiles(patterns, folder, 's').map(({ name }) => name);

describe('the files of a study', () => {
  it('are relative to its folder, sorted, each once', () => {
    expect(names(['runs/*.csv', 'c.csv', 'runs/a.csv'])).toEqual(['c.csv', 'runs/[1].csv', 'runs/a.csv', 'runs/b.csv']);
  });

  it('may have a name that reads like a pattern', () => {
    expect(names(['runs/[1].csv'])).toEqual(['runs/[1].csv']);
  });

  it('may lie outside its folder where the study says so', () => {
    expect(expandFiles(['../c.csv'], join(folder, 'runs'), 's').map(({ name }) => name)).toEqual(['../c.csv']);
  });

  it.each([
    [['none.csv'], /^s: events\.files\[0\]: no file "none\.csv"/],
    [['c.csv', 'none-*.csv'], /^s: events\.files\[1\]: no file matches "none-\*\.csv"/],
    [['runs'], /^s: events\.files\[0\]: "runs" is a folder/],
  ])('that are not there are named by JSON path: %j', (patterns, message) => {
    expect(() => names(patterns)).toThrow(message);
  });
});

it('a bundle stands beside its study, under its name', () => {
  expect(defaultBundleFolder(join(folder, 'gallery.study.json'))).toBe(join(folder, 'gallery.bundle'));
});
