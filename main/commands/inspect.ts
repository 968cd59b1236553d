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
  const proposed = proposeStudy(facts, names);
  parseStudy(proposed.study, 'the proposed study');
  const text = `${JSON.stringify(proposed.study, null, 2)}\n`;
  if (flags.study) writeNew(flags.study, text);
  if (flags.json) process.stdout.write(`${JSON.stringify({ files: facts, ...proposed })}\n`);
  else process.stdout.write(inspectText(facts, proposed, flags.study, text));
}

function writeNew(path: string, text: string): void {
  if (existsSync(path)) throw new InputError(path, 'is there already', 'name another file, or remove it');
  writeFileSync(path, text);
}

function inspectText(
  facts: FileFacts[],
  { reasons, study }: ProposedStudy,
  written: string | undefined,
  text: string,
): string {
  const lines = facts.flatMap((file) => [
    `${file.path}: ${file.format}, ${formatCount(file.bytes)} bytes, ${formatCount(file.rows)} rows, ${formatCount(file.rejected)} unreadable`,
    ...columnLines(file.columns),
    '',
  ]);
  const roles = Object.entries(study.roles).map(
    ([role, column]) => `  ${role}: ${column} (by ${reasons[role as keyof typeof reasons]})`,
  );
  lines.push('proposed roles', ...roles, '');
  if (written) lines.push(`starting study: ${written}`, `next: entasis build ${written}`);
  else lines.push('starting study (--study PATH writes it):', text.trimEnd());
  return `${lines.join('\n')}\n`;
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
