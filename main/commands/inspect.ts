import { existsSync, writeFileSync } from 'node:fs';
import { dirname, relative, resolve, sep } from 'node:path';
import { formatCount, formatNumber } from '../../src/audit/wording';
import type { ColumnFacts, FileFacts } from '../../src/events/batch';
import { inspectFile } from '../../src/events/inspect';
import { proposeStudy, type ProposedStudy } from '../../src/events/propose-study';
import { InputError } from '../../src/study/input-error';
import { expandFiles } from '../../src/study/paths';
import { parseStudy } from '../../src/study/study';
import type { Surroundings } from '../surroundings';

/** `entasis inspect FILE...`: what is in event files, and a study to start from. */
export async function inspect(
  patterns: string[],
  flags: { study?: string; json?: boolean },
  around: Surroundings,
): Promise<void> {
  const files = expandFiles(patterns, process.cwd(), 'inspect', 'file');
  const facts: FileFacts[] = [];
  for (const { path, name } of files) facts.push({ ...(await inspectFile(path, around.signal)), path: name });
  const folder = flags.study ? dirname(resolve(flags.study)) : process.cwd();
  const names = files.map(({ path }) => relative(folder, path).split(sep).join('/'));
  const proposed = proposal(facts, names);
  if (proposed instanceof InputError && flags.study) throw proposed;
  if (!(proposed instanceof InputError) && flags.study) writeNew(flags.study, studyText(proposed));
  process.stdout.write(
    flags.json ? `${JSON.stringify(inspectJson(facts, proposed))}\n` : inspectText(facts, proposed, flags.study),
  );
}

/** A study to start from, or why there can be none: the facts of the files are told either way. */
function proposal(facts: FileFacts[], names: string[]): ProposedStudy | InputError {
  try {
    const proposed = proposeStudy(facts, names);
    parseStudy(proposed.study, 'the proposed study');
    return proposed;
  } catch (error) {
    if (error instanceof InputError) return error;
    throw error;
  }
}

function writeNew(path: string, text: string): void {
  if (existsSync(path)) throw new InputError(path, 'is there already', 'name another file, or remove it');
  writeFileSync(path, text);
}

function studyText({ study }: ProposedStudy): string {
  return `${JSON.stringify(study, null, 2)}\n`;
}

function inspectJson(files: FileFacts[], proposed: ProposedStudy | InputError): unknown {
  if (!(proposed instanceof InputError)) return { files, ...proposed };
  const { where, what, remedy } = proposed;
  return { files, study: null, problem: { where, what, remedy } };
}

function inspectText(facts: FileFacts[], proposed: ProposedStudy | InputError, written: string | undefined): string {
  const lines = facts.flatMap((file) => [
    `${file.path}: ${file.format}, ${formatCount(file.bytes)} bytes, ${formatCount(file.rows)} rows, ${formatCount(file.rejected)} unreadable`,
    ...columnLines(file.columns),
    '',
  ]);
  if (proposed instanceof InputError) lines.push(`no starting study: ${proposed.what}: ${proposed.remedy}`);
  else lines.push(...proposalLines(proposed, written));
  return `${lines.join('\n')}\n`;
}

function proposalLines(proposed: ProposedStudy, written: string | undefined): string[] {
  const roles = Object.entries(proposed.study.roles).map(
    ([role, column]) => `  ${role}: ${column} (by ${proposed.reasons[role as keyof ProposedStudy['reasons']]})`,
  );
  const study = written
    ? [`starting study: ${written}`, `next: entasis build ${written}`]
    : ['starting study (--study PATH writes it):', studyText(proposed).trimEnd()];
  return ['proposed roles', ...roles, '', ...study];
}

function columnLines(columns: ColumnFacts[]): string[] {
  const rows = [
    ['column', 'type', 'missing', 'malformed', 'non-finite', 'least', 'greatest'],
    ...columns.map(columnRow),
  ];
  const widths = rows[0]!.map((_, c) => Math.max(...rows.map((row) => row[c]!.length)));
  return rows.map((row) =>
    `  ${row.map((cell, c) => (c < 2 ? cell.padEnd(widths[c]!) : cell.padStart(widths[c]!))).join('  ')}`.trimEnd(),
  );
}

function columnRow({ name, type, missing, malformed, nonFinite, least, greatest, labels }: ColumnFacts): string[] {
  const end = (x: number | null): string => (x === null ? '-' : formatNumber(x, 6));
  const kind = type === 'text' && labels ? `text, ${labels.length} labels` : type;
  return [name, kind, formatCount(missing), formatCount(malformed), formatCount(nonFinite), end(least), end(greatest)];
}
