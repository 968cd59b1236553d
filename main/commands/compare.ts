import { FALSE_DISCOVERIES, type ColumnComparison } from '../../src/audit/compare';
import { outcomePlaces } from '../../src/audit/audit-input';
import { isAbsent, type ListedMeasure } from '../../src/audit/measure';
import { formatCount, formatInterval, formatNumber, formatPercent, formatUncertain } from '../../src/audit/wording';
import { normalQuantile } from '../../src/numerics/normal';
import { compareCampaigns, type Campaign, type CampaignComparison } from '../compare';
import { alignedLines } from './aligned-lines';

/** `entasis compare A B [--json]`: how far two campaigns are apart, column by column, and what it means for a spectrum. */
export async function compare(first: string, second: string, flags: { json?: boolean }): Promise<void> {
  const found = await compareCampaigns(first, second);
  process.stdout.write(flags.json ? `${JSON.stringify(compareJson(found))}\n` : `${compareText(found).join('\n')}\n`);
}

const eventsOf = ({ model }: Campaign): number => model.tally.cells.events.reduce((a, b) => a + b, 0);
const isCompared = (column: ColumnComparison | { reason: string }): column is ColumnComparison => 'pValue' in column;
const differs = ({ adjusted }: ColumnComparison): boolean => adjusted <= FALSE_DISCOVERIES;

function compareJson({ first, second, comparison, reference }: CampaignComparison): unknown {
  const { columnNames, outcomeNames } = first.model.tally;
  const { value, lower, upper } = comparison.differences;
  const row = (cells: Float64Array, j: number): number[] => [
    ...cells.subarray(j * outcomeNames.length, (j + 1) * outcomeNames.length),
  ];
  const campaign = (one: Campaign): unknown => ({ path: one.path, title: one.title, events: eventsOf(one) });
  return {
    first: campaign(first),
    second: campaign(second),
    credibility: first.model.study.credibility,
    rate: FALSE_DISCOVERIES,
    columns: columnNames,
    outcomes: outcomeNames,
    comparisons: comparison.columns.map((column, j) =>
      isCompared(column)
        ? {
            ...column,
            differs: differs(column),
            differences: { value: row(value, j), lower: row(lower, j), upper: row(upper, j) },
          }
        : { column: columnNames[j], ...column },
    ),
    reference: reference.description,
    folded: comparison.folded,
  };
}

function compareText(found: CampaignComparison): string[] {
  const { first, second, reference } = found;
  const side = (letter: string, one: Campaign): string =>
    `${letter}: ${one.title} (${one.path}), ${formatCount(eventsOf(one))} events`;
  return [
    side('A', first),
    side('B', second),
    '',
    ...columnLines(found),
    '',
    `folded reference spectrum: ${reference.description}`,
    ...foldedLines(found),
  ];
}

/** Rows printed of a finer matrix: those that differ; the others are counted and stand in the JSON. */
const MOST_ROWS = 60;

function columnLines({ first, comparison }: CampaignComparison): string[] {
  const { columnNames } = first.model.tally;
  const compared = comparison.columns.filter(isCompared);
  const differing = compared.filter(differs);
  const shown = compared.length > MOST_ROWS ? differing : compared;
  const rows = shown.map((column) => [
    differs(column) ? '▲' : '',
    column.column,
    formatInterval(column.distance, column.lower, column.upper),
    formatNumber(column.expectedDistance, 2),
    formatNumber(column.pValue, 2),
    formatNumber(column.adjusted, 2),
    largestDifference(first, comparison, columnNames.indexOf(column.column), column.outcome),
  ]);
  const head = ['', 'column', 'distance', 'by chance', 'p', 'adjusted', 'largest difference, B minus A'];
  const reasons = comparison.columns.flatMap((column, j) =>
    isCompared(column) ? [] : [`  ${columnNames[j]} is not compared: ${column.reason}`],
  );
  const rate = formatPercent(FALSE_DISCOVERIES);
  return [
    `columns that differ: ${differing.length} of ${compared.length} (Benjamini-Hochberg at ${rate}); distances are total variation`,
    ...(rows.length > 0 ? alignedLines(head, rows, [2, 3, 4, 5]) : []),
    ...(shown.length < compared.length ? [`  and ${compared.length - shown.length} that do not`] : []),
    ...reasons,
  ];
}

function largestDifference(
  { model }: Campaign,
  { differences }: CampaignComparison['comparison'],
  j: number,
  outcome: string,
): string {
  const { outcomeNames } = model.tally;
  const at = j * outcomeNames.length + outcomeNames.indexOf(outcome);
  const { value, lower, upper } = differences;
  return `P(${outcome}) ${formatInterval(value[at]!, lower[at]!, upper[at]!)}`;
}

function foldedLines({ first: { model }, comparison }: CampaignComparison): string[] {
  const { first, second, change } = comparison.folded;
  if (isAbsent(first) || isAbsent(second) || isAbsent(change)) {
    return [`  not folded: ${isAbsent(first) ? first.reason : 'no content'}`];
  }
  const names = outcomePlaces(model).window.map((k) => model.tally.outcomeNames[k]!);
  const moved = (i: number): boolean => change.lower[i]! > 0 || change.upper[i]! < 0;
  const all = [...names.keys()];
  const shown = all.length > MOST_ROWS ? all.filter(moved) : all;
  const reach = 2 * normalQuantile((1 + model.study.credibility) / 2);
  const reading = ({ value, lower, upper }: ListedMeasure, i: number): string =>
    formatUncertain(value[i]!, (upper[i]! - lower[i]!) / reach);
  const rows = shown.map((i) => [
    moved(i) ? '▲' : '',
    names[i]!,
    reading(first, i),
    reading(second, i),
    formatInterval(change.value[i]!, change.lower[i]!, change.upper[i]!),
    first.value[i]! > 0 ? formatPercent(change.value[i]! / first.value[i]!, 2) : '–',
  ]);
  const level = formatPercent(model.study.credibility);
  return [
    `bins that change beyond the ${level} interval of both matrices: ${all.filter(moved).length} of ${all.length}`,
    ...(rows.length > 0 ? alignedLines(['', 'bin', 'A', 'B', 'B minus A', 'of A'], rows, [2, 3, 4, 5]) : []),
  ];
}
