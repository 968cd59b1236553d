import { evenEdges, type Axis } from './axis';
import type { AxisDocument } from './study';

/** The axis of a checked study, with its edges made. Apart from the schema, which workers need not load. */
export function resolveAxis(axis: AxisDocument): Axis {
  if ('tags' in axis) return { kind: 'tags', label: axis.label, unit: '', tags: axis.tags };
  const edges =
    'edges' in axis ? Float64Array.from(axis.edges) : evenEdges(axis.from, axis.to, axis.bins, axis.spacing);
  return { kind: 'numeric', label: axis.label, unit: axis.unit, spacing: axis.spacing, edges };
}
