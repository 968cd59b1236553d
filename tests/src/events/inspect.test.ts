import { gzipSync } from 'node:zlib';
import { describe, expect, test } from 'vitest';
import { MOST_LABELS } from '../../../src/events/batch';
import { inspectFile } from '../../../src/events/inspect';
import { fileOf } from './gather';

describe('inspecting a delimited table', () => {
  const text = 't,r,run,w\n1,2,a,1\n-4.5,NaN,b,inf\n"7",,"a",-inf\n1,2\n8,9,10,11,12\n"x\n\n0,nan,,NULL\n';

  test('tells rows, rejected lines, and of every column type, missing and non-finite values, range and labels', async () => {
    const path = fileOf(text);
    expect(await inspectFile(path)).toEqual({
      path,
      format: 'csv',
      bytes: text.length,
      rows: 4,
      rejected: 3,
      columns: [
        { name: 't', type: 'number', missing: 0, malformed: 0, nonFinite: 0, least: -4.5, greatest: 7, labels: null },
        { name: 'r', type: 'number', missing: 3, malformed: 0, nonFinite: 0, least: 2, greatest: 2, labels: null },
        {
          name: 'run',
          type: 'text',
          missing: 1,
          malformed: 0,
          nonFinite: 0,
          least: null,
          greatest: null,
          labels: ['a', 'b'],
        },
        { name: 'w', type: 'number', missing: 1, malformed: 0, nonFinite: 2, least: 1, greatest: 1, labels: null },
      ],
    });
  });

  test('reads through gzip', async () => {
    const [plain, packed] = await Promise.all([
      inspectFile(fileOf(text)),
      inspectFile(fileOf(gzipSync(text), '.csv.gz')),
    ]);
    expect(packed.columns).toEqual(plain.columns);
    expect(packed.rows).toBe(4);
  });

  test('makes a column text where more than one value in twenty is no number, and loses no row either way', async () => {
    const column = async (bad: number) => {
      const rows = Array.from({ length: 2000 }, (_, i) => (i < bad ? 'last' : String(i % 7)));
      const { columns, rows: count, rejected } = await inspectFile(fileOf(`a\n${rows.reverse().join('\n')}\n`));
      expect([count, rejected]).toEqual([2000, 0]);
      return columns[0];
    };
    expect(await column(100)).toMatchObject({ type: 'number', malformed: 100, least: 0, greatest: 6 });
    const labels = ['0', '1', '2', '3', '4', '5', '6', 'last'];
    expect(await column(101)).toMatchObject({ type: 'text', malformed: 0, least: null, labels });
  });

  test('lists labels up to a limit and none beyond it', async () => {
    const labels = (count: number) => Array.from({ length: count }, (_, i) => `run ${i}`).join('\n');
    const [at, beyond] = [
      await inspectFile(fileOf(`a\n${labels(MOST_LABELS)}`)),
      await inspectFile(fileOf(`a\n${labels(MOST_LABELS + 1)}`)),
    ];
    expect(at.columns[0].labels!.length).toBe(MOST_LABELS);
    expect(beyond.columns[0].labels).toBeNull();
  });

  test('tells a column without any value as a number without a range', async () => {
    const { columns } = await inspectFile(fileOf('a,b\n,1\nNaN,2\n'));
    expect(columns[0]).toEqual({
      name: 'a',
      type: 'number',
      missing: 2,
      malformed: 0,
      nonFinite: 0,
      least: null,
      greatest: null,
      labels: null,
    });
  });

  test('is cancelled between two blocks', async () => {
    const stop = new AbortController();
    stop.abort();
    await expect(inspectFile(fileOf(text), stop.signal)).rejects.toThrow('cancelled');
  });
});
