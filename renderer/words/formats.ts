import type { FormatId } from '../../src/handover/formats';

/** What a bundle can be handed over as, for the person who chooses. */
export const FORMATS: readonly { id: FormatId; title: string; ending: string; replicas: boolean }[] = [
  { id: 'npz', title: 'NumPy archive (NPZ)', ending: '.npz', replicas: true },
  { id: 'hdf5', title: 'HDF5', ending: '.h5', replicas: true },
  { id: 'parquet', title: 'Parquet', ending: '.parquet', replicas: true },
  { id: 'arrow', title: 'Arrow', ending: '.arrow', replicas: true },
  { id: 'csv', title: 'CSV', ending: '.csv', replicas: true },
  { id: 'json', title: 'Parameters for samplers (JSON)', ending: '.json', replicas: false },
  { id: 'fits', title: 'OGIP response files (FITS)', ending: '.fits', replicas: true },
];
