import type { Axis } from '../../src/study/axis';
import { resolveAxis } from '../../src/study/resolve-axis';
import type { Study } from '../../src/study/study';

/** Both axes of a checked study with what belongs to them. */
export interface Axes {
  true: Axis;
  reconstructed: Axis;
  /** Whether the last outcome is `lost`. */
  lost: boolean;
}

export function axesOf(study: Study): Axes {
  return {
    true: resolveAxis(study.axes.true),
    reconstructed: resolveAxis(study.axes.reconstructed),
    lost: study.lost === 'missing',
  };
}
