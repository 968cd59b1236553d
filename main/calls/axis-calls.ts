import { InputError } from '../../src/study/input-error';
import { MOST_BINS, resolveAxis, type Study } from '../../src/study/study';
import type { NumericAxis } from '../../src/study/axis';
import { evenEdges } from '../../src/study/axis';
import { rowSums, type Tally } from '../../src/tally/tally';
import { equalPopulation, followResolution, mergeThin } from '../../src/tally/suggest-axis';
import type { AxisSuggestion, Checked, Histogram } from '../bridge';
import { Refused } from '../session/refusal';
import type { StudyFiles } from '../session/study-events';
import { studyFiles } from './event-calls';
import type { Desk, Handlers } from './handlers';

type AxisName = 'true' | 'reconstructed';

/** Fine bins over which the resolution is looked at: true columns, and reconstructed bins in each. */
const FINE_COLUMNS = 200;
const FINE_BINS = 1000;

/** Histograms of the values, and suggestions for the edges of an axis. */
export function axisCalls(desk: Desk): Handlers<'histogram' | 'suggestAxis'> {
  return {
    histogram: ({ study, folder, of, ...range }) =>
      histogram(desk, known(desk, studyFiles(desk, study, folder)), of, range),
    suggestAxis: ({ study, folder, axis, by }) => suggest(desk, known(desk, studyFiles(desk, study, folder)), axis, by),
  };
}

function known(desk: Desk, at: StudyFiles): StudyFiles {
  if (!desk.events.known(at)) throw new Refused('not-read', 'events', 'not read yet', 'read the events first');
  return at;
}

function numericAxis({ axes }: Study, name: AxisName): NumericAxis {
  const axis = resolveAxis(axes[name]);
  if (axis.kind === 'numeric') return axis;
  throw new InputError(`axes.${name}`, 'an axis of tags has no edges', 'list its tags');
}

async function histogram(
  desk: Desk,
  at: StudyFiles,
  of: AxisName,
  { bins, from, to, spacing }: Pick<Checked<'histogram'>, 'bins' | 'from' | 'to' | 'spacing'>,
): Promise<Histogram> {
  const axis = numericAxis(at.study, of);
  const { edges: present } = axis;
  const [lo, hi] = [from ?? present[0]!, to ?? present[present.length - 1]!];
  const how = spacing ?? axis.spacing;
  if (!(lo < hi)) throw new InputError('histogram', `${hi} is not above ${lo}`, 'give to > from');
  if (how === 'log' && !(lo > 0)) throw new InputError('histogram', `${lo} on a log axis`, 'start above 0');
  const edges = evenEdges(lo, hi, bins, how);
  const counts = await countOn(desk, at, of, edges);
  const end = counts.length - 1;
  return { edges, counts: counts.slice(1, end - 1), below: counts[0]!, above: counts[end - 1]!, missing: counts[end]! };
}

/** Events in `below`, each bin, `above`, and (last) without a value, of one role alone. */
async function countOn(desk: Desk, at: StudyFiles, of: AxisName, edges: Float64Array): Promise<Float64Array> {
  const other = of === 'true' ? 'reconstructed' : 'true';
  const tally = await desk.events.apart(at, fineStudy(at.study, { [of]: edges, [other]: whole(at.study, other) }), {});
  const { events } = tally.cells;
  const outcomes = tally.outcomeNames.length;
  const sums = of === 'true' ? rowSums(events, outcomes) : columnSums(events, outcomes);
  const out = new Float64Array(edges.length + 2);
  out.set(sums);
  return out;
}

function columnSums(values: Float64Array, length: number): Float64Array {
  const sums = new Float64Array(length);
  values.forEach((value, i) => (sums[i % length]! += value));
  return sums;
}

/** One bin where only the other axis is looked at; tags stay what they are. */
function whole({ axes }: Study, name: AxisName): Float64Array | null {
  const axis = axes[name];
  return 'tags' in axis ? null : Float64Array.of(0, 1);
}

/** The study with other edges and nothing but counts. Edges may be more than a study may have. */
function fineStudy(study: Study, edges: Partial<Record<AxisName, Float64Array | null>>): Study {
  const { weight: _w, run: _r, event: _e, ...roles } = study.roles;
  const fine = (name: AxisName): Study['axes']['true'] => {
    const list = edges[name];
    return list ? { label: '', unit: '', edges: [...list], spacing: 'linear' } : study.axes[name];
  };
  return { ...study, roles, axes: { true: fine('true'), reconstructed: fine('reconstructed') } };
}

async function suggest(
  desk: Desk,
  at: StudyFiles,
  name: AxisName,
  by: Checked<'suggestAxis'>['by'],
): Promise<AxisSuggestion> {
  const axis = numericAxis(at.study, name);
  const window = { from: axis.edges[0]!, to: axis.edges[axis.edges.length - 1]!, spacing: axis.spacing };
  if ('equalPopulation' in by) {
    const { bins } = by.equalPopulation;
    const countIn = async (edges: Float64Array): Promise<Float64Array> =>
      (await countOn(desk, at, name, edges)).slice(1, edges.length);
    return noted(await equalPopulation(countIn, window, bins), (made) => `${made} bins with equal numbers of events`);
  }
  if ('followResolution' in by) return followed(desk, at, name, window, by.followResolution.factor);
  return merged(await desk.events.tally(at, {}), axis, name, by.mergeThin.effective);
}

function noted(edges: number[], note: (bins: number) => string): AxisSuggestion {
  return { edges, note: note(edges.length - 1) };
}

async function followed(
  desk: Desk,
  at: StudyFiles,
  name: AxisName,
  window: { from: number; to: number },
  factor: number,
): Promise<AxisSuggestion> {
  const ends = (axis: NumericAxis): [number, number] => [axis.edges[0]!, axis.edges[axis.edges.length - 1]!];
  const trueEdges = evenEdges(...ends(numericAxis(at.study, 'true')), FINE_COLUMNS, 'linear');
  const recoEdges = evenEdges(...ends(numericAxis(at.study, 'reconstructed')), FINE_BINS, 'linear');
  const tally = await desk.events.apart(at, fineStudy(at.study, { true: trueEdges, reconstructed: recoEdges }), {});
  try {
    const fine = { events: insideOf(tally, FINE_COLUMNS, FINE_BINS), trueEdges, recoEdges };
    const edges = followResolution(fine, name, window, factor, MOST_BINS);
    return noted(
      edges,
      (made) => `${made} bins as wide as ${factor} times the local resolution (central 68 % half-width)`,
    );
  } catch (cause) {
    if (!(cause instanceof RangeError)) throw cause;
    const remedy = 'widen the window, or read more events';
    throw new InputError(`axes.${name}`, `the resolution cannot be seen: ${cause.message}`, remedy, { cause });
  }
}

/** The cells of the bins alone, without the outer columns and outcomes. */
function insideOf(tally: Tally, columns: number, bins: number): Float64Array {
  const outcomes = tally.outcomeNames.length;
  const inside = new Float64Array(columns * bins);
  for (let j = 0; j < columns; j++) {
    const from = (j + 1) * outcomes + 1;
    inside.set(tally.cells.events.subarray(from, from + bins), j * bins);
  }
  return inside;
}

function merged({ tally }: { tally: Tally }, axis: NumericAxis, name: AxisName, limit: number): AxisSuggestion {
  const { events, weights, squares } = tally.cells;
  const outcomes = tally.outcomeNames.length;
  const sums = (values: Float64Array): number[] => {
    const all = name === 'true' ? rowSums(values, outcomes) : columnSums(values, outcomes);
    return [...all.slice(1, axis.edges.length)];
  };
  const edges = mergeThin([...axis.edges], sums(weights ?? events), sums(squares ?? events), limit);
  const before = axis.edges.length - 1;
  return noted(edges, (made) =>
    made === before
      ? `no bin is below ${limit} effective entries`
      : `${before} bins merged to ${made}, none below ${limit} effective entries unless one is left`,
  );
}
