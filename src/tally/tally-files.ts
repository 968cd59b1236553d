import { mkdtempSync, rmSync } from 'node:fs';
import { tmpdir } from 'node:os';
import { join } from 'node:path';
import type { Reject, Unit } from '../events/batch';
import { readerFor, readerOfFormat } from '../events/formats';
import { expandFiles } from '../study/paths';
import { stopIfCancelled } from '../study/input-error';
import type { Study } from '../study/study';
import { BatchTally } from './batch-tally';
import { findDuplicates, IdentitySpill, spilledBuckets } from './identities';
import { tallyPlan, type TallyPlan } from './plan';
import type { Tally } from './tally';

export interface TallyFilesOptions {
  signal?: AbortSignal | undefined;
  /** Hears every rejected row; `place` is its line or row in `file`, counted from 1. */
  onReject?: ((file: string, reject: Reject) => void) | undefined;
}

const WRITER = 'one';

/**
 * Reads the event files of a study, whose paths are relative to `folder`, in this one thread, and tallies them. Memory
 * is bounded by batches. Sums are exact: the tally is, to the bit, the one that many workers make. Throws `InputError`
 * for a file that is absent, damaged or unsuitable, and `Cancelled` when the signal says so.
 */
export async function tallyFiles(study: Study, folder: string, options: TallyFilesOptions = {}): Promise<Tally> {
  const plan = tallyPlan(study);
  const units: Unit[] = [];
  for (const { path, name } of expandFiles(study.events.files, folder, 'study')) {
    units.push(...(await (await readerFor(path)).plan(path, name, plan.needs, 1)));
  }
  const scratch = plan.at.event < 0 ? null : mkdtempSync(join(tmpdir(), 'entasis-'));
  try {
    const spill = scratch === null ? null : new IdentitySpill(scratch, WRITER);
    const sums = await readUnits(units, plan, spill, options);
    spill?.finish();
    const places = (unit: number, place: number): string => placeName(units[unit]!, place);
    return sums.finish(scratch === null ? null : findDuplicates(spilledBuckets(scratch, [WRITER]), places));
  } finally {
    if (scratch !== null) rmSync(scratch, { recursive: true, force: true });
  }
}

async function readUnits(
  units: readonly Unit[],
  plan: TallyPlan,
  spill: IdentitySpill | null,
  { signal, onReject }: TallyFilesOptions,
): Promise<BatchTally> {
  const sums = new BatchTally(plan);
  for (const [ordinal, unit] of units.entries()) {
    const reader = readerOfFormat(unit.format);
    for await (const batch of reader.read(unit, plan.needs, signal)) {
      stopIfCancelled(signal);
      const { events, rejects, identity } = sums.add(batch, (place) => placeName(unit, place));
      if (identity) spill?.add(identity, events.rows, ordinal);
      if (onReject) for (const reject of rejects) onReject(unit.name, reject);
    }
  }
  return sums;
}

function placeName({ name, format }: Unit, place: number): string {
  return readerOfFormat(format).places === 'line' ? `${name}:${place}` : `${name}: row ${place}`;
}
