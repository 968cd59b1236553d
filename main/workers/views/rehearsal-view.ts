import { REHEARSAL, rehearse, type Rehearsal, type WayOfInferring } from '../../../src/audit/rehearsal';
import { InputError } from '../../../src/study/input-error';
import type { Estimates, RehearsalSide, RehearsalView } from '../../bridge';
import type { Audited } from '../analysis';

/** Rehearses the matrix's use, telling `note` the share that is done. Throws `InputError` where it has no meaning. */
export function rehearsalView(
  { analysis, reference }: Audited,
  repetitions: number,
  note: (note: { done: number; total: number }) => void,
): RehearsalView {
  const rehearsing = rehearse(analysis, reference, { ...REHEARSAL, repetitions });
  let step = rehearsing.next();
  while (!step.done) {
    note({ done: Math.round(step.value * repetitions), total: repetitions });
    step = rehearsing.next();
  }
  if ('reason' in step.value) {
    throw new InputError('rehearsal', step.value.reason, 'choose another reference spectrum');
  }
  const { contents } = reference;
  return viewOf(step.value, Float64Array.from([...contents].filter((content) => content > 0)));
}

function viewOf(rehearsal: Rehearsal, reference: Float64Array): RehearsalView {
  const { columns, convergence, isMatched, options } = rehearsal;
  const mixed = convergence.unmixed === 0;
  return {
    columnNames: columns.map(({ column }) => column),
    reference,
    repetitions: options.repetitions,
    fixed: sideOf(rehearsal, 'fixed'),
    free: sideOf(rehearsal, 'free'),
    narrowing: Float64Array.from(columns, ({ narrowed }) => narrowed),
    rHat: convergence.rhat,
    effectiveDraws: convergence.effectiveDraws,
    unmixed: convergence.unmixed,
    matched: isMatched,
    note: mixed
      ? 'every inference has mixed'
      : 'some inferences ended before they had mixed: do not trust their coverage',
    seconds: 0,
  };
}

function sideOf({ columns, overall }: Rehearsal, way: 'fixed' | 'free'): RehearsalSide {
  const ways = columns.map((column) => column[way]);
  const overallAt = (level: 0 | 1) => ({ value: overall[way].coverage[level], error: overall[way].error[level] });
  return {
    coverage68: coverageAt(ways, 0),
    coverage95: coverageAt(ways, 1),
    width68: Float64Array.from(ways, ({ width }) => width[0]),
    width95: Float64Array.from(ways, ({ width }) => width[1]),
    overall68: overallAt(0),
    overall95: overallAt(1),
  };
}

function coverageAt(ways: readonly WayOfInferring[], level: 0 | 1): Estimates {
  const list = (name: 'value' | 'lower' | 'upper'): Float64Array =>
    Float64Array.from(ways, ({ coverage }) => coverage[level][name]);
  return { value: list('value'), lower: list('lower'), upper: list('upper') };
}
