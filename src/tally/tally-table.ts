import type { Batch, Column, Need, Reject } from '../events/batch';
import { identifyNumber, identifyText } from '../events/identity';
import { InputError } from '../study/input-error';
import type { Study } from '../study/study';
import { BatchTally } from './batch-tally';
import { findDuplicates } from './identities';
import { tallyPlan } from './plan';
import type { Tally } from './tally';

/** A column of events in memory: numbers (`NaN` is missing) or texts (`null` and the empty text are missing). */
export type EventColumn = ArrayLike<number> | readonly (string | null)[];

/**
 * Tallies events that are in memory, one array a column under the names that the study's roles and cuts use. What cuts,
 * losses and checks do with a row is the same as for a file; `events.files` of the study plays no part. Rejected rows
 * are returned with their place, counted from 1. Throws `InputError` where a column is absent, of another length than
 * the others, or of another kind than its role needs.
 */
export function tallyTable(study: Study, columns: Record<string, EventColumn>): { tally: Tally; rejects: Reject[] } {
  const plan = tallyPlan(study);
  const rows = lengthOf(columns);
  const batch: Batch = {
    rows,
    places: Float64Array.from({ length: rows }, (_, i) => i + 1),
    columns: plan.needs.map((need) => columnOf(need, columns)),
    rejects: [],
    bytes: 0,
    placesPassed: rows,
  };
  const sums = new BatchTally(plan);
  const { events, rejects, identity } = sums.add(batch, rowName);
  if (!identity) return { tally: sums.finish(null), rejects };
  const records = new Uint32Array(events.rows * WORDS);
  for (let i = 0; i < events.rows; i++)
    records.set([identity.high[i]!, identity.low[i]!, 0, identity.places[i]!], i * WORDS);
  return { tally: sums.finish(findDuplicates([records], (_, place) => rowName(place))), rejects };
}

/** Words of an identity record: key high, key low, unit, place. */
const WORDS = 4;

const rowName = (place: number): string => `row ${place}`;

function lengthOf(columns: Record<string, EventColumn>): number {
  const [first, ...others] = Object.entries(columns);
  if (!first) throw new InputError('columns', 'there are none', 'give one array a column');
  const odd = others.find(([, values]) => values.length !== first[1].length);
  if (!odd) return first[1].length;
  const what = `${odd[1].length} rows where "${first[0]}" has ${first[1].length}`;
  throw new InputError(`columns.${odd[0]}`, what, 'give arrays of one length');
}

function columnOf({ column, as }: Need, columns: Record<string, EventColumn>): Column {
  const values = Object.hasOwn(columns, column) ? columns[column]! : undefined;
  if (!values)
    throw new InputError(`columns.${column}`, 'there is no such column', 'give it, or mend the roles and cuts');
  if (as === 'identity') return identities(values);
  const texts = isTexts(values);
  if (as === 'number') {
    if (!texts) return { as, values: Float64Array.from(values as ArrayLike<number>) };
    throw new InputError(
      `columns.${column}`,
      'texts where numbers are needed',
      'give numbers, NaN where one is missing',
    );
  }
  const labels: string[] = [];
  const known = new Map<string, number>();
  const codes = Int32Array.from(values as ArrayLike<string | number | null>, (value) => {
    if (value === null || value === '' || Number.isNaN(value)) return -1;
    const label = String(value);
    if (!known.has(label)) known.set(label, labels.push(label) - 1);
    return known.get(label)!;
  });
  return { as, codes, labels };
}

function isTexts(values: EventColumn): values is readonly (string | null)[] {
  return Array.isArray(values) && values.some((value) => typeof value !== 'number');
}

function identities(values: EventColumn): Column {
  const [high, low] = [new Uint32Array(values.length), new Uint32Array(values.length)];
  for (let i = 0; i < values.length; i++) {
    const value = values[i]!;
    if (typeof value === 'number') identifyNumber(value, high, low, i);
    else if (value !== null) identifyText(value, high, low, i);
  }
  return { as: 'identity', high, low };
}
