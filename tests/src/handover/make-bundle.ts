import { mkdirSync, mkdtempSync, writeFileSync } from 'node:fs';
import { tmpdir } from 'node:os';
import { dirname, join } from 'node:path';
import { CAUTIONS } from '../../../src/handover/cautions';
import type { Manifest } from '../../../src/handover/manifest';
import { writeNpy, type NpyType } from '../../../src/handover/npy';
import { weigh } from '../../../src/handover/whole-file';
import { columnNames, outcomeNames } from '../../../src/study/axis';
import { studyFingerprint } from '../../../src/study/fingerprint';
import { parseStudy, resolveAxis, type StudyInput } from '../../../src/study/study';

export interface BundleWishes {
  folder?: string;
  replicas?: number;
  weighted?: boolean;
  runs?: number;
  axes?: StudyInput['axes'];
  lost?: 'missing' | 'unrecorded';
}

/** Two bins between other columns, three outcomes between others: an invented gamma detector. */
const SMALL_AXES: StudyInput['axes'] = {
  true: { label: 'Photon energy', unit: 'MeV', from: 0.1, to: 0.7, bins: 3 },
  reconstructed: { label: 'Cluster "energy"', unit: 'MeV', edges: [0, 0.2, 0.4, 0.9, 1.7] },
};

/**
 * Writes a bundle folder as design.md describes it, with numbers that are easy to predict and no two alike. Cell 1 of
 * every column is empty without a pseudo-count, so that zeros occur.
 */
export async function makeBundle(wishes: BundleWishes = {}): Promise<string> {
  const folder = wishes.folder ?? mkdtempSync(join(tmpdir(), 'entasis-bundle-'));
  const study = parseStudy({
    schema: 'entasis.study/1',
    title: 'Bench photons, "test"',
    events: { files: ['a.csv'] },
    roles: { true: 't', reconstructed: 'r' },
    axes: wishes.axes ?? SMALL_AXES,
    lost: wishes.lost ?? 'missing',
    ensemble: { replicas: wishes.replicas ?? 5, seed: 77 },
  });
  const columns = columnNames(resolveAxis(study.axes.true));
  const outcomes = outcomeNames(resolveAxis(study.axes.reconstructed), study.lost === 'missing');
  const shape = [columns.length, outcomes.length];
  const size = columns.length * outcomes.length;
  const counts = Float64Array.from({ length: size }, (_, i) => (i % outcomes.length === 1 ? 0 : (i * 7919) % 997));
  const gammaShape = counts.map((n, i) => (i % outcomes.length === 1 ? 0 : n + 0.5));
  const arrays: [string, NpyType, number[], Float64Array][] = [
    ['tally/counts', '<i8', shape, counts],
    ['posterior/shape', '<f8', shape, gammaShape],
    ['posterior/mean', '<f8', shape, normalised(gammaShape, outcomes.length)],
    ['posterior/sd', '<f8', shape, counts.map((n) => Math.sqrt(n) / 3e3)],
    ['posterior/lower', '<f8', shape, counts.map((n) => n / 3e3)],
    ['posterior/upper', '<f8', shape, counts.map((n) => (n + 1) / 3e3)],
    [
      'replicas',
      '<f8',
      [study.ensemble.replicas, ...shape],
      replicasOf(study.ensemble.replicas, gammaShape, outcomes.length),
    ],
  ];
  if (wishes.weighted) {
    arrays.push(['tally/weights', '<f8', shape, counts.map((n) => n * 0.7)]);
    arrays.push(['tally/squares', '<f8', shape, counts.map((n) => n * 0.5)]);
    arrays.push(['posterior/scale', '<f8', shape, counts.map((_, i) => 0.5 + (i % 3))]);
  }
  const labels = wishes.runs ? Array.from({ length: wishes.runs }, (_, i) => `run ${i}`) : null;
  if (labels) {
    const runs = Float64Array.from({ length: labels.length * size }, (_, i) => i % 89);
    arrays.push(['tally/runs', '<i8', [labels.length, ...shape], runs]);
  }
  const layouts: Manifest['arrays'] = {};
  const files: Manifest['files'] = {};
  for (const [name, type, of, values] of arrays) {
    layouts[`${name}.npy`] = {
      type,
      shape: of,
      axes: [name === 'replicas' ? 'replica' : 'run', 'column', 'outcome'].slice(-of.length),
      holds: '',
    };
    const path = join(folder, `${name}.npy`);
    mkdirSync(dirname(path), { recursive: true });
    await writeNpy(path, type, of, values);
    files[`${name}.npy`] = await weigh(path);
  }
  writeFileSync(join(folder, 'study.json'), JSON.stringify(study));
  const rows = counts.reduce((sum, n) => sum + n, 0);
  const none = { cut: 0, rejected: 0, unmatched: 0, reasons: {}, clamped: { cells: 0, weight: 0 } };
  const manifest: Manifest = {
    schema: 'entasis.bundle/1',
    program: { name: 'entasis', version: '0.1.0' },
    title: study.title,
    study: { fingerprint: studyFingerprint(study) },
    inputs: [],
    seed: study.ensemble.seed,
    replicas: study.ensemble.replicas,
    blockSize: 32,
    columns,
    outcomes,
    runs: labels,
    weighted: wishes.weighted ?? false,
    lostRecorded: study.lost === 'missing',
    credibility: study.credibility,
    ledger: { read: rows, tallied: rows, ...none },
    flags: { flagged: 0, undecided: 0 },
    arrays: layouts,
    files: { ...files, 'study.json': await weigh(join(folder, 'study.json')) },
    duplicates: null,
    trueRange: null,
    cautions: [...CAUTIONS],
  };
  writeFileSync(join(folder, 'manifest.json'), JSON.stringify(manifest));
  return folder;
}

function replicasOf(replicas: number, shape: Float64Array, outcomes: number): Float64Array {
  const all = new Float64Array(replicas * shape.length);
  for (let r = 0; r < replicas; r++) {
    all.set(
      normalised(
        shape.map((a, i) => a * (1 + ((r * 31 + i * 17) % 101) / 1e3)),
        outcomes,
      ),
      r * shape.length,
    );
  }
  return all;
}

function normalised(values: Float64Array, length: number): Float64Array {
  const sums = Float64Array.from({ length: values.length / length }, (_, j) =>
    values.subarray(j * length, (j + 1) * length).reduce((sum, v) => sum + v, 0),
  );
  return values.map((v, i) => v / sums[Math.floor(i / length)]!);
}
