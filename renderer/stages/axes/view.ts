import type { Range } from '../../../main/bridge';
import type { AxisDocument } from '../../../src/study/study';
import { edgesOf } from '../../bench/edges';
import type { Extent } from '../../draw/scale';

/** Shown beyond the axis on either side where events lie there, as a share of the axis. */
const BEYOND = 0.2;

/** The range that the picture of an axis shows: the axis, and a part of what was observed outside of it. */
export function viewOf(axis: AxisDocument, observed: Range | null): Extent {
  if ('tags' in axis) return { kind: 'linear', from: 0, to: axis.tags.length };
  const edges = edgesOf(axis);
  const from = edges[0] ?? observed?.least ?? 0;
  const to = edges.at(-1) ?? observed?.greatest ?? 1;
  return axis.spacing === 'log' && from > 0 ? logView(from, to, observed) : linearView(from, to, observed);
}

function linearView(from: number, to: number, observed: Range | null): Extent {
  const beyond = (to - from) * BEYOND;
  const low = Math.min(from, Math.max(observed?.least ?? from, from - beyond));
  const high = Math.max(to, Math.min(observed?.greatest ?? to, to + beyond));
  const air = (high - low) * 0.01;
  return { kind: 'linear', from: low - air, to: high + air };
}

function logView(from: number, to: number, observed: Range | null): Extent {
  const beyond = (to / from) ** BEYOND;
  const least = observed && observed.least > 0 ? observed.least : from;
  const low = Math.min(from, Math.max(least, from / beyond));
  const high = Math.max(to, Math.min(observed?.greatest ?? to, to * beyond));
  const air = (high / low) ** 0.01;
  return { kind: 'log', from: low / air, to: high * air };
}
