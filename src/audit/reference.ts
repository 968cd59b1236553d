import { midpoint, type Axis, type NumericAxis } from '../study/axis';
import { InputError } from '../study/input-error';
import type { Reference } from '../study/study';
import { rowSums, shapeOf, type Tally } from '../tally/tally';
import { parseReferenceTable, type ReferenceTable } from './reference-table';

/** The true spectrum that feed-in, purity, slope bias and influence rest on. */
export interface ReferenceSpectrum {
  /** `[columns]`: expected generated events, summing to the study's `reference.events` (all 0 for an empty tally). */
  contents: Float64Array;
  /** `[columns]`: share of a column's content in the lower half of its bin; 1 without midpoint or content. */
  lowerShares: Float64Array;
  /** One line to stand beside every number that rests on it. */
  description: string;
  /** Range of true values that the spectrum covers, in the axis's unit; `null` for `calibration` and on tag axes. */
  range: { from: number; to: number } | null;
}

export interface ReferenceSources {
  /** Text of a table file as the study names it; needed for the kind `table` alone. */
  readTable?: (file: string) => string;
  /** Names the study in errors. */
  where?: string;
}

/**
 * The reference spectrum of a study, binned on its true axis by closed-form integrals (tables by area).
 * Range: `from` and `to` of the study; by default the table's own, or the axis widened by the true values
 * tallied, so that `below` and `above` get content.
 * `flat` is flat in the true value itself, on a log axis too; on a tag axis it is equal content for every tag.
 * Throws `InputError` for a kind that a tag axis cannot have, a power law that begins at or below 0, a range that
 * misses the axis, and a faulty table.
 */
export function referenceOf(
  reference: Reference,
  trueAxis: Axis,
  tally: Tally,
  sources: ReferenceSources = {},
): ReferenceSpectrum {
  if (reference.kind === 'calibration') return calibrationSpectrum(reference, tally);
  const where = sources.where ?? 'study';
  if (trueAxis.kind === 'tags') return flatTags(reference, trueAxis.tags.length, where);
  const shape = shapeOfReference(reference, trueAxis, tally, sources, where);
  return binned(shape, trueAxis, reference.events);
}

/** A spectrum before it is binned: its integral over `[a, b]` inside the range, up to a common factor. */
interface SpectrumShape {
  area: (a: number, b: number) => number;
  from: number;
  to: number;
  name: string;
}

function calibrationSpectrum(reference: Reference, tally: Tally): ReferenceSpectrum {
  const { columns, outcomes } = shapeOf(tally);
  const content = (cells: Tally['cells']): Float64Array =>
    rowSums(cells.weights ?? cells.events, outcomes).map((sum) => Math.max(0, sum));
  const totals = content(tally.cells);
  const halves = content(tally.halves);
  const all = totals.reduce((a, b) => a + b, 0);
  const lowerShares = new Float64Array(columns);
  for (let j = 0; j < columns; j++) {
    const both = halves[2 * j]! + halves[2 * j + 1]!;
    lowerShares[j] = both > 0 ? halves[2 * j]! / both : 1;
  }
  const contents = totals.map((content) => (all > 0 ? (reference.events * content) / all : 0));
  return {
    contents,
    lowerShares,
    description: `the calibration's own spectrum, ${reference.events} events`,
    range: null,
  };
}

function flatTags(reference: Reference, tags: number, where: string): ReferenceSpectrum {
  if (reference.kind !== 'flat') {
    throw new InputError(
      `${where}: reference.kind`,
      `"${reference.kind}" on a tag axis`,
      'use "calibration" or "flat"',
    );
  }
  return {
    contents: new Float64Array(tags).fill(reference.events / tags),
    lowerShares: new Float64Array(tags).fill(1),
    description: `equal content for every tag, ${reference.events} events`,
    range: null,
  };
}

function shapeOfReference(
  reference: Reference,
  axis: NumericAxis,
  tally: Tally,
  sources: ReferenceSources,
  where: string,
): SpectrumShape {
  const table = reference.kind === 'table' ? tableOf(reference.file!, sources) : null;
  const { from, to } = rangeOf(reference, axis, table, tally.trueRange, where);
  const within = { from, to };
  switch (reference.kind) {
    case 'powerLaw':
      if (!(from > 0)) {
        throw new InputError(
          `${where}: reference.from`,
          `a power law from ${from}`,
          'state a range that begins above 0',
        );
      }
      return { ...within, area: powerArea(reference.index!, from, to), name: `power law of index ${reference.index}` };
    case 'exponential':
      return {
        ...within,
        area: exponentialArea(reference.scale!, from),
        name: `exponential of scale ${reference.scale}`,
      };
    case 'table':
      return { ...within, area: tableArea(table!), name: `table ${reference.file}` };
    default:
      return { ...within, area: (a, b) => b - a, name: 'flat spectrum' };
  }
}

function tableOf(file: string, { readTable }: ReferenceSources): ReferenceTable {
  if (!readTable) throw new RangeError('a reference table needs `readTable`');
  return parseReferenceTable(readTable(file), file);
}

function rangeOf(
  reference: Reference,
  { edges }: NumericAxis,
  table: ReferenceTable | null,
  observed: Tally['trueRange'],
  where: string,
): { from: number; to: number } {
  const first = edges[0]!;
  const last = edges[edges.length - 1]!;
  const widest = table
    ? { from: table.lo[0]!, to: table.hi[table.hi.length - 1]! }
    : { from: Math.min(first, observed?.least ?? first), to: Math.max(last, observed?.greatest ?? last) };
  const from = reference.from ?? widest.from;
  const to = reference.to ?? widest.to;
  if (!(from < last && to > first && from < to)) {
    throw new InputError(
      `${where}: reference`,
      `range ${from} to ${to} misses the true axis (${first} to ${last})`,
      'state from and to across the axis',
    );
  }
  return { from, to };
}

/** `integral of x^index` over `[a, b]` relative to the range's heavier end, so that steep laws do not overflow. */
function powerArea(index: number, from: number, to: number): SpectrumShape['area'] {
  const power = index + 1;
  return (a, b) => {
    const width = Math.log(b / a);
    if (power === 0) return width;
    if (power < 0) return (Math.exp(power * Math.log(a / from)) * Math.expm1(power * width)) / power;
    return (Math.exp(power * Math.log(b / to)) * -Math.expm1(-power * width)) / power;
  };
}

/** `integral of exp(-x / scale)` over `[a, b]`, relative to its value at `from`. */
function exponentialArea(scale: number, from: number): SpectrumShape['area'] {
  return (a, b) => Math.exp(-(a - from) / scale) * -Math.expm1(-(b - a) / scale);
}

function tableArea({ lo, hi, content }: ReferenceTable): SpectrumShape['area'] {
  return (a, b) => {
    let sum = 0;
    for (let i = 0; i < lo.length; i++) {
      const overlap = Math.min(b, hi[i]!) - Math.max(a, lo[i]!);
      if (overlap > 0) sum += content[i]! * (overlap / (hi[i]! - lo[i]!));
    }
    return sum;
  };
}

function binned(shape: SpectrumShape, axis: NumericAxis, events: number): ReferenceSpectrum {
  const { edges } = axis;
  const bins = edges.length - 1;
  const piece = (a: number, b: number): number => {
    const lo = Math.max(a, shape.from);
    const hi = Math.min(b, shape.to);
    return hi > lo ? shape.area(lo, hi) : 0;
  };
  const contents = new Float64Array(bins + 2);
  const lowerShares = new Float64Array(bins + 2).fill(1);
  contents[0] = piece(-Infinity, edges[0]!);
  contents[bins + 1] = piece(edges[bins]!, Infinity);
  for (let i = 0; i < bins; i++) {
    const lower = piece(edges[i]!, midpoint(axis, i));
    const both = lower + piece(midpoint(axis, i), edges[i + 1]!);
    contents[i + 1] = both;
    if (both > 0) lowerShares[i + 1] = lower / both;
  }
  const total = contents.reduce((a, b) => a + b, 0);
  if (!(total > 0)) throw new InputError('reference', 'no content in its range', 'widen the range');
  const unit = axis.unit ? ` ${axis.unit}` : '';
  return {
    contents: contents.map((content) => (events * content) / total),
    lowerShares,
    description: `${shape.name} from ${shape.from} to ${shape.to}${unit}, ${events} events`,
    range: { from: shape.from, to: shape.to },
  };
}
