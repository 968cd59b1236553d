/** What window, report, bundle and README say about the safety of use, in these words. */
export const CAUTIONS = [
  'The uncertainty given is the statistical uncertainty of the calibration only; systematic effects are yours to add.',
  'Entasis is not a certified dosimetry or safety instrument.',
  'Local codes and licensed or accredited practice come first.',
] as const;
