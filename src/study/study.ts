import { z } from './zod';
import { InputError } from './input-error';
import { resolveAxis } from './resolve-axis';

export { resolveAxis };

/** The study document, schema `entasis.study/1`: everything a build depends on besides the events themselves. */
export const STUDY_SCHEMA = 'entasis.study/1';

/** Most bins an axis may have: beyond it a matrix no longer fits the memory a build promises. */
export const MOST_BINS = 2000;
export const MOST_REPLICAS = 10_000_000;

const finite = z.number();
const columnName = z.string().min(1, 'needs the name of a column');
const text = z.string().max(400);

const evenAxis = z.strictObject({
  label: text.default(''),
  unit: text.default(''),
  from: finite,
  to: finite,
  bins: z.int().min(1).max(MOST_BINS),
  spacing: z.enum(['linear', 'log']).default('linear'),
});
const edgeAxis = z.strictObject({
  label: text.default(''),
  unit: text.default(''),
  edges: z
    .array(finite)
    .min(2)
    .max(MOST_BINS + 1),
  spacing: z.enum(['linear', 'log']).default('linear'),
});
const tagAxis = z.strictObject({
  label: text.default(''),
  tags: z.array(z.string().min(1)).min(1).max(MOST_BINS),
});

const scalar = z.union([finite, z.string()]);
const cut = z.strictObject({
  column: columnName,
  is: z.enum(['<', '<=', '>', '>=', '=', '!=', 'in']),
  value: z.union([finite, z.string(), z.array(scalar).min(1).max(10_000)]),
});

const share = finite.min(0).max(1);

/** Default limits of the audit's flags, all settable in the study under `limits`. */
const limits = z.strictObject({
  thin: finite.positive().default(100),
  'prior-led': share.default(0.1),
  lossy: share.default(0.5),
  'spill-below': share.default(0.05),
  'spill-above': share.default(0.05),
  'feed-in': share.default(0.1),
  unstable: share.default(0.5),
  impure: share.default(0.5),
  'slope-bias': finite.positive().default(1),
  'run-drift': share.default(0.05),
  'run-drift-distance': share.default(0.05),
  'single-event': share.default(0.1),
  'matrix-limited': finite.positive().default(1),
});

const prior = z.union([
  z.strictObject({ pseudoCount: finite.min(0).max(1e6) }),
  z.strictObject({ pseudoTotal: finite.min(0).max(1e9) }),
  z.strictObject({ neighbours: z.strictObject({}) }),
]);

const reference = z.strictObject({
  kind: z.enum(['calibration', 'flat', 'powerLaw', 'exponential', 'table']),
  index: finite.optional(),
  scale: finite.positive().optional(),
  file: z.string().min(1).optional(),
  from: finite.optional(),
  to: finite.optional(),
  events: finite.positive().max(1e15).default(30_000),
});

const document = z.strictObject({
  schema: z.literal(STUDY_SCHEMA),
  title: text.default('Untitled study'),
  events: z.strictObject({ files: z.array(z.string().min(1)).min(1) }),
  roles: z.strictObject({
    true: columnName,
    reconstructed: columnName,
    weight: columnName.optional(),
    run: columnName.optional(),
    event: columnName.optional(),
  }),
  lost: z.enum(['missing', 'unrecorded']).default('missing'),
  unmatched: z.enum(['reject', 'count']).default('reject'),
  cuts: z.array(cut).default([]),
  axes: z.strictObject({
    true: z.union([evenAxis, edgeAxis, tagAxis]),
    reconstructed: z.union([evenAxis, edgeAxis, tagAxis]),
  }),
  prior: prior.default({ pseudoCount: 0.5 }),
  credibility: finite.gt(0).lt(1).default(0.95),
  reference: reference.default({ kind: 'calibration', events: 30_000 }),
  limits: limits.prefault({}),
  ensemble: z
    .strictObject({
      replicas: z.int().min(0).max(MOST_REPLICAS).default(1000),
      seed: z.int().min(0).max(Number.MAX_SAFE_INTEGER).default(1),
    })
    .prefault({}),
});

/** A study as resolved: every default filled in. */
export type Study = z.output<typeof document>;
/** A study as a user may write it: what has a default may be left out. */
export type StudyInput = z.input<typeof document>;
export type Cut = Study['cuts'][number];
export type Prior = Study['prior'];
export type Limits = Study['limits'];
export type Reference = Study['reference'];
export type AxisDocument = Study['axes']['true'];

/**
 * Checks a parsed JSON value against the schema and fills in the defaults.
 * `where` names the document in errors. Throws `InputError` at the first fault, naming its JSON path.
 */
export function parseStudy(value: unknown, where = 'study'): Study {
  const axes = (value as { axes?: Record<string, unknown> } | null)?.axes;
  // A union's own message would list every alternative: the axis is told by the keys it has, and checked as that one.
  if (axes && typeof axes === 'object') {
    for (const name of ['true', 'reconstructed']) checkAs(axisSchemaOf(axes[name]), axes[name], where, ['axes', name]);
  }
  const study = checkAs(document, value, where, []);
  checkAxis(study.axes.true, where, 'axes.true');
  checkAxis(study.axes.reconstructed, where, 'axes.reconstructed');
  checkCuts(study.cuts, where);
  checkReference(study.reference, where);
  return study;
}

/** Parses the text of a study document. Throws `InputError` for text that is not JSON, with its line. */
export function parseStudyText(text: string, where: string): Study {
  return parseStudy(parseJson(text, where), where);
}

/** JSON text to a value; a fault becomes an `InputError` at `where:line` with the cause kept. */
export function parseJson(text: string, where: string): unknown {
  try {
    return JSON.parse(text.replace(/^\uFEFF/, ''));
  } catch (cause) {
    const message = (cause as Error).message;
    const position = /position (\d+)/.exec(message)?.[1];
    const line = position === undefined ? lastLine(text) : text.slice(0, Number(position)).split('\n').length;
    throw new InputError(`${where}:${line}`, 'not valid JSON', `mend the text there (${message})`, { cause });
  }
}

function lastLine(text: string): number {
  return text.trimEnd().split('\n').length;
}

function axisSchemaOf(value: unknown): z.ZodType {
  const keys = typeof value === 'object' && value !== null ? value : {};
  if ('tags' in keys) return tagAxis;
  return 'edges' in keys ? edgeAxis : evenAxis;
}

function checkAs<T>(schema: z.ZodType<T>, value: unknown, where: string, base: string[]): T {
  const result = schema.safeParse(value);
  if (result.success) return result.data;
  const issue = deepest(result.error.issues[0]!);
  const path = jsonPath([...base, ...issue.path.map(String)]);
  if (issue.code === 'unrecognized_keys') {
    const key = jsonPath([...base, ...issue.path.map(String), issue.keys[0]!]);
    throw new InputError(`${where}: ${key}`, 'unknown key', 'take it out or correct its spelling');
  }
  throw new InputError(`${where}: ${path}`, lowerFirst(issue.message), 'correct it');
}

type Issue = z.core.$ZodIssue;

/** The most telling fault inside a union: that of the alternative which fits furthest. */
function deepest(issue: Issue): Issue {
  if (issue.code !== 'invalid_union') return issue;
  let best: Issue | undefined;
  for (const alternative of issue.errors) {
    const first = alternative[0];
    if (!first) continue;
    const inner = deepest(first);
    if (!best || inner.path.length > best.path.length) best = inner;
  }
  return best ? { ...best, path: [...issue.path, ...best.path] } : issue;
}

function jsonPath(parts: string[]): string {
  if (parts.length === 0) return '$';
  return parts.map((part, i) => (/^\d+$/.test(part) ? `[${part}]` : i === 0 ? part : `.${part}`)).join('');
}

function lowerFirst(message: string): string {
  return message.charAt(0).toLowerCase() + message.slice(1);
}

function checkAxis(axis: AxisDocument, where: string, path: string): void {
  if ('tags' in axis) {
    const repeated = axis.tags.findIndex((tag, i) => axis.tags.indexOf(tag) !== i);
    if (repeated >= 0) {
      throw new InputError(
        `${where}: ${path}.tags[${repeated}]`,
        `tag "${axis.tags[repeated]}" repeats`,
        'list it once',
      );
    }
    return;
  }
  if ('edges' in axis) {
    const bad = axis.edges.findIndex((edge, i) => i > 0 && !(edge > axis.edges[i - 1]!));
    if (bad > 0) {
      const how =
        axis.edges[bad] === axis.edges[bad - 1] ? 'repeats the edge before it' : 'is below the edge before it';
      throw new InputError(
        `${where}: ${path}.edges[${bad}]`,
        `edge ${axis.edges[bad]} ${how}`,
        'list increasing edges',
      );
    }
  } else if (!(axis.to > axis.from)) {
    throw new InputError(`${where}: ${path}.to`, `${axis.to} is not above from (${axis.from})`, 'give to > from');
  }
  const lowest = 'edges' in axis ? axis.edges[0]! : axis.from;
  if (axis.spacing === 'log' && !(lowest > 0)) {
    const key = 'edges' in axis ? 'edges[0]' : 'from';
    throw new InputError(`${where}: ${path}.${key}`, `${lowest} on a log axis`, 'start above 0 or use linear spacing');
  }
  const edges = (resolveAxis(axis) as { edges: Float64Array }).edges;
  if (edges.some((edge, i) => i > 0 && !(edge > edges[i - 1]!))) {
    throw new InputError(`${where}: ${path}.bins`, 'bins narrower than a number can resolve', 'use fewer bins');
  }
}

function checkCuts(cuts: Cut[], where: string): void {
  cuts.forEach((cut, i) => {
    const path = `${where}: cuts[${i}].value`;
    if ((cut.is === 'in') !== Array.isArray(cut.value)) {
      throw new InputError(
        path,
        `"${cut.is}" with ${Array.isArray(cut.value) ? 'a list' : 'a single value'}`,
        'use "in" with a list, the other comparisons with one value',
      );
    }
    if (Array.isArray(cut.value) && new Set(cut.value.map((v) => typeof v)).size > 1) {
      throw new InputError(path, 'numbers and texts in one list', 'list one kind only');
    }
    if (typeof cut.value === 'string' && cut.is !== '=' && cut.is !== '!=') {
      throw new InputError(path, `text "${cut.value}" with "${cut.is}"`, 'give a number, or use "=", "!=" or "in"');
    }
  });
}

function checkReference(reference: Reference, where: string): void {
  const needs: Partial<Record<Reference['kind'], 'index' | 'scale' | 'file'>> = {
    powerLaw: 'index',
    exponential: 'scale',
    table: 'file',
  };
  const key = needs[reference.kind];
  if (key && reference[key] === undefined) {
    throw new InputError(`${where}: reference.${key}`, `missing for the kind "${reference.kind}"`, 'add it');
  }
  if (reference.from !== undefined && reference.to !== undefined && !(reference.to > reference.from)) {
    throw new InputError(
      `${where}: reference.to`,
      `${reference.to} is not above from (${reference.from})`,
      'give to > from',
    );
  }
}
