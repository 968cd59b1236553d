import { z } from '../study/zod';
import { InputError } from '../study/input-error';
import { parseJson } from '../study/study';

/** The bundle's table of contents, schema `entasis.bundle/1`. */
export const BUNDLE_SCHEMA = 'entasis.bundle/1';

const count = z.int().min(0);
const sha256 = z.string().regex(/^[0-9a-f]{64}$/);
/** A path inside the bundle: plain names joined by `/`, so that no bundle can reach outside its own folder. */
const inside = z.string().regex(/^[A-Za-z0-9][A-Za-z0-9._-]*(\/[A-Za-z0-9][A-Za-z0-9._-]*)*$/);

const ledger = z.object({
  read: count,
  cut: count,
  rejected: count,
  unmatched: count.default(0),
  tallied: count,
  reasons: z.record(z.string(), count),
  clamped: z.object({ cells: count, weight: z.number() }),
});

const manifest = z.object({
  schema: z.literal(BUNDLE_SCHEMA),
  program: z.object({ name: z.string(), version: z.string() }),
  title: z.string(),
  study: z.object({ fingerprint: sha256 }),
  inputs: z.array(z.object({ file: z.string(), bytes: count, sha256, rows: count, rejected: count })),
  seed: count,
  replicas: count,
  /** Replicas a block: each column's stream of random numbers begins anew with every block. */
  blockSize: z.int().min(1),
  columns: z.array(z.string()).min(1),
  outcomes: z.array(z.string()).min(1),
  runs: z.array(z.string()).nullable(),
  weighted: z.boolean(),
  lostRecorded: z.boolean(),
  credibility: z.number(),
  ledger,
  flags: z.object({ flagged: count, undecided: count }),
  arrays: z.record(
    inside,
    z.object({ type: z.enum(['<f8', '<i8']), shape: z.array(count), axes: z.array(z.string()), holds: z.string() }),
  ),
  files: z.record(inside, z.object({ bytes: count, sha256 })),
  duplicates: z
    .object({ identities: count, rows: count, examples: z.array(z.array(z.string())) })
    .nullable()
    .default(null),
  trueRange: z.object({ least: z.number(), greatest: z.number() }).nullable().default(null),
  cautions: z.array(z.string()),
});

export type Manifest = z.output<typeof manifest>;
export type BundleArray = Manifest['arrays'][string];

/** Reads the text of a `manifest.json`. Throws `InputError` naming the JSON path of the first fault. */
export function parseManifest(text: string, where: string): Manifest {
  const result = manifest.safeParse(parseJson(text, where));
  if (result.success) return result.data;
  const issue = result.error.issues[0]!;
  throw new InputError(
    `${where}: ${issue.path.join('.')}`,
    issue.message.toLowerCase(),
    'the bundle is damaged: build it again',
  );
}
