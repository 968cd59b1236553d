import { closeSync, existsSync, mkdtempSync, openSync, readFileSync, readSync, rmSync } from 'node:fs';
import { tmpdir } from 'node:os';
import { join, resolve } from 'node:path';
import { z } from '../src/study/zod';
import { FolderInTheMaking } from '../src/handover/folder-in-the-making';
import { readNpy } from '../src/handover/npy';
import { InputError } from '../src/study/input-error';
import { parseJson } from '../src/study/study';
import type { PlainCellSums } from '../src/tally/cell-sums';
import { findDuplicates, IdentitySpill, sortedRecords, spilledBuckets } from '../src/tally/identities';
import { planIdentity, planOfText, planText, type TallyPlan } from '../src/tally/plan';
import type { Tally } from '../src/tally/tally';
import { TallySums, type PlainTallySums } from '../src/tally/tally-sums';
import type { InputFile, RejectedRow } from './read-events';
import { hashFile } from './workers/hash-file';

/**
 * A part: the tally of some of a study's files, as a folder that a batch job leaves for `combine` and `build --from`.
 * It holds the exact sums, not their rounded values, so that parts combine to the same bytes in any order.
 */
export const PART_SCHEMA = 'entasis.part/1';
const PART = 'part.json';
const REJECTS = 'rejects.jsonl';
const IDENTITIES = 'identities.bin';

/** A tally with everything needed to write it as a part, or to build from it. */
export interface TallyPart {
  plan: TallyPlan;
  sums: TallySums;
  inputs: InputFile[];
  rejectedRows(): Iterable<RejectedRow>;
  /** Records `[high, low, index of the file in inputs, place]`, bucket by bucket; `null` where none is read. */
  identities: (() => Iterable<Uint32Array>) | null;
}

/** Parts joined to one, with what they keep on disk. */
export interface CombinedParts extends TallyPart {
  tally: Tally;
  close(): void;
}

const count = z.int().min(0);
const partSchema = z.object({
  schema: z.literal(PART_SCHEMA),
  plan: z.string(),
  inputs: z.array(
    z.object({
      name: z.string(),
      bytes: count,
      sha256: z.string(),
      rows: count,
      rejected: count,
      places: z.enum(['line', 'row']),
    }),
  ),
  runs: z.array(z.string()),
  trueRange: z.object({ least: z.number().nullable(), greatest: z.number().nullable() }),
  ledger: z.object({
    read: count,
    cut: count,
    rejected: count,
    unmatched: count,
    tallied: count,
    reasons: z.record(z.string(), count),
    clamped: z.object({ cells: count, weight: z.number() }),
  }),
  files: z.record(z.string(), z.object({ bytes: count, sha256: z.string() })),
});
type PartDocument = z.output<typeof partSchema>;

/** Writes a part at `out`, whole or not at all. */
export function writePart(out: string, part: TallyPart): void {
  const folder = new FolderInTheMaking(resolve(out), PART);
  try {
    const plain = part.sums.toPlain(true);
    writeCellSums(folder, 'halves', plain.halves);
    plain.runs.forEach(({ cells }, r) => writeCellSums(folder, `runs/${r}`, cells));
    if (plain.unmatched) writeCellSums(folder, 'unmatched', plain.unmatched);
    if (plain.largestSquare) writeValues(folder, 'largest-square', plain.largestSquare, [plain.largestSquare.length]);
    folder.stream(REJECTS, (put) => {
      for (const row of part.rejectedRows()) put(Buffer.from(`${JSON.stringify(row)}\n`));
    });
    if (part.identities) writeIdentities(folder, part.identities());
    folder.write(PART, `${JSON.stringify(describe(part, plain, folder.files), null, 1)}\n`);
    folder.finish();
  } catch (error) {
    folder.abandon();
    throw error;
  }
}

function describe(part: TallyPart, plain: PlainTallySums, files: PartDocument['files']): PartDocument {
  const { least, greatest } = plain.trueRange;
  const finite = (x: number): number | null => (Number.isFinite(x) ? x : null);
  return {
    schema: PART_SCHEMA,
    plan: planText(part.plan),
    inputs: part.inputs,
    runs: plain.runs.map(({ label }) => label),
    trueRange: { least: finite(least), greatest: finite(greatest) },
    ledger: plain.ledger,
    files,
  };
}

function writeCellSums(folder: FolderInTheMaking, name: string, { events, weights, squares }: PlainCellSums): void {
  writeValues(folder, `${name}-events`, events, [events.length]);
  if (weights) writeValues(folder, `${name}-weights`, weights.partials, [events.length, weights.stride]);
  if (squares) writeValues(folder, `${name}-squares`, squares.partials, [events.length, squares.stride]);
}

function writeValues(folder: FolderInTheMaking, name: string, values: Float64Array, shape: number[]): void {
  folder.array(`${name}.npy`, '<f8', shape, values, [], 'exact sums');
}

function writeIdentities(folder: FolderInTheMaking, buckets: Iterable<Uint32Array>): void {
  folder.stream(IDENTITIES, (put) => {
    for (const records of buckets) put(new Uint8Array(sortedRecords(records).buffer));
  });
}

/**
 * Opens parts and joins them to one, its files sorted by name. Throws `InputError` for a damaged part, parts of
 * different studies (or of another than `study`), or a file that stands in two parts.
 */
export async function combineParts(paths: readonly string[], study: TallyPlan | null): Promise<CombinedParts> {
  const documents: PartDocument[] = [];
  for (const path of paths) documents.push(await readPart(path));
  const plan = planOfText(documents[0]!.plan);
  checkSameStudy(paths, documents, study ?? plan, study !== null);
  const inputs = joinInputs(paths, documents);
  const sums = new TallySums(plan);
  paths.forEach((path, i) => sums.merge(TallySums.fromPlain(plan, readSums(path, documents[i]!))));
  const scratch = mkdtempSync(join(tmpdir(), 'entasis-'));
  const close = (): void => rmSync(scratch, { recursive: true, force: true });
  const identities = plan.at.event < 0 ? null : joinIdentities(paths, documents, inputs, scratch);
  const named = (file: number, place: number): string => {
    const { name, places } = inputs[file]!;
    return places === 'line' ? `${name}:${place}` : `${name}: row ${place}`;
  };
  const tally = sums.finish(identities && findDuplicates(identities(), named));
  return { plan, sums, inputs, tally, rejectedRows: () => joinRejected(paths, inputs), identities, close };
}

async function readPart(path: string): Promise<PartDocument> {
  const where = join(path, PART);
  if (!existsSync(where)) throw new InputError(path, 'not a part', 'name a folder that `entasis tally` has written');
  const result = partSchema.safeParse(parseJson(readFileSync(where, 'utf8'), where));
  if (!result.success) throw damaged(where, result.error.issues[0]!.path.join('.'));
  for (const [name, { sha256 }] of Object.entries(result.data.files)) {
    const file = join(path, name);
    if (!existsSync(file) || (await hashFile(file)) !== sha256) throw damaged(file, 'its hash');
  }
  return result.data;
}

function damaged(where: string, what: string): InputError {
  return new InputError(where, `${what} is not as it was written`, 'tally this part again');
}

function checkSameStudy(
  paths: readonly string[],
  documents: PartDocument[],
  plan: TallyPlan,
  fromStudy: boolean,
): void {
  const wanted = planIdentity(plan);
  documents.forEach((document, i) => {
    if (planIdentity(planOfText(document.plan)) === wanted) return;
    const other = fromStudy ? 'the study' : paths[0]!;
    throw new InputError(
      paths[i]!,
      `its roles, cuts or axes are not those of ${other}`,
      'tally it again with this study',
    );
  });
}

function joinInputs(paths: readonly string[], documents: PartDocument[]): InputFile[] {
  const from = new Map<string, string>();
  const inputs: InputFile[] = [];
  documents.forEach((document, i) => {
    for (const input of document.inputs) {
      const known = from.get(input.name) ?? from.get(input.sha256);
      if (known !== undefined && known !== paths[i]) {
        throw new InputError(paths[i]!, `${input.name} is in ${known} too`, 'name each file in one part only');
      }
      from.set(input.name, paths[i]!).set(input.sha256, paths[i]!);
      inputs.push(input);
    }
  });
  return inputs.sort((a, b) => (a.name < b.name ? -1 : 1));
}

function readSums(path: string, document: PartDocument): PlainTallySums {
  const plan = planOfText(document.plan);
  const weighted = plan.at.weight >= 0;
  const values = (name: string) => readNpy(join(path, `${name}.npy`));
  const partials = (name: string) => {
    const { shape, values: flat } = values(name);
    return { stride: shape[1]!, partials: flat };
  };
  const cells = (name: string): PlainCellSums => ({
    events: values(`${name}-events`).values,
    weights: weighted ? partials(`${name}-weights`) : null,
    squares: weighted ? partials(`${name}-squares`) : null,
  });
  const { least, greatest } = document.trueRange;
  return {
    halves: cells('halves'),
    runs: document.runs.map((label, r) => ({ label, cells: cells(`runs/${r}`) })),
    unmatched: plan.countUnmatched ? cells('unmatched') : null,
    largestSquare: weighted ? values('largest-square').values : null,
    trueRange: { least: least ?? Infinity, greatest: greatest ?? -Infinity },
    ledger: document.ledger,
  };
}

function* joinRejected(paths: readonly string[], inputs: InputFile[]): Generator<RejectedRow> {
  for (const { name, rejected } of inputs) {
    if (rejected === 0) continue;
    for (const path of paths) {
      for (const line of readFileSync(join(path, REJECTS), 'utf8').split('\n')) {
        if (line === '') continue;
        const row = JSON.parse(line) as RejectedRow;
        if (row.file === name) yield row;
      }
    }
  }
}

const RECORDS_AT_ONCE = 1 << 16;

/** Spreads the identities of all parts over buckets again, their files numbered as in the joined list. */
function joinIdentities(
  paths: readonly string[],
  documents: PartDocument[],
  inputs: InputFile[],
  scratch: string,
): () => Iterable<Uint32Array> {
  const joined = new Map(inputs.map(({ name }, i) => [name, i]));
  const spill = new IdentitySpill(scratch, 'joined');
  paths.forEach((path, p) => {
    const fileOf = documents[p]!.inputs.map(({ name }) => joined.get(name)!);
    const file = openSync(join(path, IDENTITIES), 'r');
    const records = new Uint32Array(RECORDS_AT_ONCE * 4);
    try {
      for (let bytes; (bytes = readSync(file, new Uint8Array(records.buffer))) > 0;) {
        for (let i = 0; i < bytes / 4; i += 4) {
          spill.addRecord(records[i]!, records[i + 1]!, fileOf[records[i + 2]!]!, records[i + 3]!);
        }
      }
    } finally {
      closeSync(file);
    }
  });
  spill.finish();
  return () => spilledBuckets(scratch, ['joined']);
}
