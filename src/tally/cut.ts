import type { Column, NumberColumn, TextColumn } from '../events/batch';
import type { Cut } from '../study/study';

/** Writes 1 into `pass[i]` where row `i` satisfies a cut, else 0. A missing value satisfies none. */
export type CutTest = (column: Column, rows: number, pass: Uint8Array) => void;

/** One test a cut; the cuts of a study are joined by *and*. Values are compared, never run. */
export function cutTests(cuts: readonly Cut[]): CutTest[] {
  return cuts.map((cut) => {
    const values = Array.isArray(cut.value) ? cut.value : [cut.value];
    return typeof values[0] === 'string'
      ? textTest(cut.is, values as string[])
      : numberTest(cut.is, values as number[]);
  });
}

const COMPARE: Record<Exclude<Cut['is'], 'in'>, (x: number, value: number) => boolean> = {
  '<': (x, value) => x < value,
  '<=': (x, value) => x <= value,
  '>': (x, value) => x > value,
  '>=': (x, value) => x >= value,
  '=': (x, value) => x === value,
  '!=': (x, value) => x !== value,
};

function numberTest(is: Cut['is'], values: number[]): CutTest {
  const among = new Set(values);
  const satisfies = is === 'in' ? (x: number) => among.has(x) : COMPARE[is];
  const value = values[0]!;
  return (column, rows, pass) => {
    const { values: xs } = column as NumberColumn;
    for (let i = 0; i < rows; i++) pass[i] = xs[i] === xs[i] && satisfies(xs[i]!, value) ? 1 : 0;
  };
}

function textTest(is: Cut['is'], values: string[]): CutTest {
  return (column, rows, pass) => {
    const { codes, labels } = column as TextColumn;
    const ofCode = labels.map((label) => (values.includes(label) === (is !== '!=') ? 1 : 0));
    for (let i = 0; i < rows; i++) pass[i] = codes[i]! < 0 ? 0 : ofCode[codes[i]!]!;
  };
}
