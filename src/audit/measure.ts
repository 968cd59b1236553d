/**
 * One measure at all its places, as `audit.json` holds it: a list each of values and interval ends, in the order of the
 * places. A place where the measure has no value is `null` in every list and named in `absent` with the reason; ends
 * are `null` too where a measure has a value but no interval. No element is ever NaN or infinite.
 */
export interface ListedMeasure {
  value: (number | null)[];
  lower: (number | null)[];
  upper: (number | null)[];
  absent: { place: string; reason: string }[];
}

/** A measure that has no meaning in the study at hand. */
export interface AbsentMeasure {
  value: null;
  reason: string;
}

export type Measure = ListedMeasure | AbsentMeasure;

/** What is known at one place. */
export type Reading = { value: number; lower: number | null; upper: number | null } | { reason: string };

/** Makes the lists of a measure from its readings, one a place. Throws `RangeError` at a number that is not finite. */
export function listMeasure(places: readonly string[], readings: readonly Reading[]): ListedMeasure {
  const measure: ListedMeasure = { value: [], lower: [], upper: [], absent: [] };
  readings.forEach((reading, i) => {
    const known = 'value' in reading ? reading : null;
    if (known) requireFinite(known, places[i]!);
    else measure.absent.push({ place: places[i]!, reason: (reading as { reason: string }).reason });
    measure.value.push(known?.value ?? null);
    measure.lower.push(known?.lower ?? null);
    measure.upper.push(known?.upper ?? null);
  });
  return measure;
}

export function isAbsent(measure: Measure): measure is AbsentMeasure {
  return measure.value === null;
}

function requireFinite(reading: { value: number; lower: number | null; upper: number | null }, place: string): void {
  for (const number of [reading.value, reading.lower, reading.upper]) {
    if (number !== null && !Number.isFinite(number)) throw new RangeError(`a measure of ${place} is ${number}`);
  }
}
