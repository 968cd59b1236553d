import type { Axis } from '../study/axis';
import type { Bundle } from './open-bundle';

/**
 * Where the numbers of a handed-over file come from, as texts: formats with room for attributes carry them under these
 * keys.
 */
export function provenance(bundle: Bundle): Record<string, string> {
  const { manifest, study, axes } = bundle;
  return {
    schema: manifest.schema,
    program: `${manifest.program.name} ${manifest.program.version}`,
    title: manifest.title,
    study_fingerprint: manifest.study.fingerprint,
    seed: String(manifest.seed),
    replicas_in_bundle: String(bundle.replicas),
    credibility: String(study.credibility),
    true_axis: axisTitle(axes.true),
    reconstructed_axis: axisTitle(axes.reconstructed),
    cautions: manifest.cautions.join(' '),
  };
}

/** `Photon energy [MeV]`; the unit is left out where there is none. */
export function axisTitle(axis: Axis): string {
  return axis.unit ? `${axis.label} [${axis.unit}]` : axis.label;
}
