import { existsSync } from 'node:fs';
import { join } from 'node:path';
import { compareTallies, type Comparison } from '../src/audit/compare';
import type { ReferenceSpectrum } from '../src/audit/reference';
import { referenceOf } from '../src/audit/reference';
import { matrixSampler, modelOf, type Model } from '../src/handover/analyse';
import { bundleTally, referenceTable } from '../src/handover/bundle-tally';
import { openBundle, type Bundle } from '../src/handover/open-bundle';
import { MANIFEST } from '../src/handover/write-bundle';
import type { Axis } from '../src/study/axis';
import { InputError } from '../src/study/input-error';
import { parseStudy, STUDY_SCHEMA, type AxisDocument, type Study } from '../src/study/study';
import type { TallyPlan } from '../src/tally/plan';
import type { Tally } from '../src/tally/tally';
import { combineParts } from './parts';

/** One side of a comparison: a bundle, or a part, which has no prior, credibility, seed or reference of its own. */
export interface Campaign {
  path: string;
  title: string;
  model: Model;
}

export interface CampaignComparison {
  first: Campaign;
  second: Campaign;
  reference: ReferenceSpectrum;
  comparison: Comparison;
}

/**
 * Compares two bundles or parts of the same axes; see `compareTallies`. Each bundle keeps its own prior; a part takes the
 * settings of the other side, or the defaults where both are parts. The reference spectrum is the first's where it is a bundle,
 * else the second's. Throws `InputError` where there is nothing to compare, or axes or units differ.
 */
export async function compareCampaigns(firstPath: string, secondPath: string): Promise<CampaignComparison> {
  const sides = [await openSide(firstPath), await openSide(secondPath)] as const;
  const bundle = sides.find((side) => side.bundle !== null)?.bundle ?? null;
  const [first, second] = sides.map((side) => campaignOf(side, bundle)) as [Campaign, Campaign];
  checkUnits(first, second);
  const { study, trueAxis, tally } = first.model;
  const sources = { where: firstPath, ...(bundle && { readTable: () => referenceTable(bundle) }) };
  const reference = referenceOf(bundle?.study.reference ?? study.reference, trueAxis, tally, sources);
  const comparison = compareTallies(first.model, second.model, reference, matrixSampler, secondPath);
  return { first, second, reference, comparison };
}

type Side = { path: string; tally: Tally } & ({ bundle: Bundle } | { bundle: null; plan: TallyPlan });

async function openSide(path: string): Promise<Side> {
  if (existsSync(join(path, MANIFEST))) {
    const bundle = openBundle(path);
    return { path, tally: bundleTally(bundle), bundle };
  }
  if (!existsSync(join(path, 'part.json'))) {
    throw new InputError(path, 'neither a bundle nor a part', 'name the folder of one');
  }
  const part = await combineParts([path], null);
  try {
    return { path, tally: part.tally, bundle: null, plan: part.plan };
  } finally {
    part.close();
  }
}

function campaignOf(side: Side, other: Bundle | null): Campaign {
  const { path, tally } = side;
  const study = side.bundle ? side.bundle.study : partStudy(side.plan, path, other?.study ?? null);
  return { path, title: study.title, model: modelOf(study, tally, path) };
}

/** A study for a part: its own axes, with the settings of another study or the defaults. */
function partStudy(plan: TallyPlan, path: string, other: Study | null): Study {
  const settings = other && { prior: other.prior, credibility: other.credibility, ensemble: other.ensemble };
  return parseStudy(
    {
      schema: STUDY_SCHEMA,
      title: path.slice(-MOST_TITLE),
      events: { files: [path] },
      roles: { true: 'true', reconstructed: 'reconstructed' },
      lost: plan.lostRecorded ? 'missing' : 'unrecorded',
      axes: { true: axisDocument(plan.trueAxis), reconstructed: axisDocument(plan.recoAxis) },
      ...settings,
    },
    path,
  );
}

/** Letters that a study's title may have. */
const MOST_TITLE = 400;

function axisDocument(axis: Axis): AxisDocument {
  if (axis.kind === 'tags') return { label: axis.label, tags: axis.tags };
  const { label, unit, spacing, edges } = axis;
  return { label, unit, spacing, edges: [...edges] };
}

/** Equal numbers in other units are other bins. */
function checkUnits(first: Campaign, second: Campaign): void {
  for (const name of ['trueAxis', 'recoAxis'] as const) {
    const [a, b] = [first.model[name].unit, second.model[name].unit];
    if (a === '' || b === '' || a === b) continue;
    const axis = name === 'trueAxis' ? 'true' : 'reconstructed';
    throw new InputError(
      `${second.path}: axes.${axis}.unit`,
      `"${b}" against "${a}"`,
      'compare campaigns of the same axes',
    );
  }
}
