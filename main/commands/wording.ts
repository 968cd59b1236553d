import type { Flag } from '../../src/audit/flag';
import { formatCount } from '../../src/audit/wording';
import type { Ledger } from '../../src/tally/ledger';

/** The ledger as the law it obeys, and the rejected rows by reason. */
export function ledgerText(ledger: Ledger, files: number): string[] {
  const { read, cut, rejected, unmatched, tallied, reasons, clamped } = ledger;
  const terms = [`cut ${formatCount(cut)}`, `rejected ${formatCount(rejected)}`];
  if (unmatched > 0) terms.push(`unmatched ${formatCount(unmatched)}`);
  terms.push(`tallied ${formatCount(tallied)}`);
  const lines = [`read ${formatCount(read)} = ${terms.join(' + ')} (${files} ${files === 1 ? 'file' : 'files'})`];
  for (const [reason, rows] of Object.entries(reasons)) lines.push(`  rejected ${formatCount(rows)}: ${reason}`);
  if (clamped.cells > 0) {
    lines.push(`  set aside: weight ${clamped.weight} in ${clamped.cells} cells without positive weight`);
  }
  return lines;
}

/** Flags raised that are printed in full before the rest is only counted. */
const MOST_FLAGS = 40;

/** One line a flag that is raised: a filled triangle flagged, an open ring undecided, then evidence and advice. */
export function flagLines(flags: readonly Flag[]): string[] {
  const raised = (['flagged', 'undecided'] as const).flatMap((state) => flags.filter((flag) => flag.state === state));
  const lines = raised.slice(0, MOST_FLAGS).map(({ state, id, column, bin, evidence, advice }) => {
    const mark = state === 'flagged' ? '▲' : '○';
    const place = column ?? bin;
    const of = place === null ? '' : ` ${column === null ? 'bin ' : ''}${place}`;
    return `  ${mark} ${id}${of}: ${[evidence, advice].filter((text) => text !== '').join(' ')}`;
  });
  if (raised.length > MOST_FLAGS) lines.push(`  and ${raised.length - MOST_FLAGS} more in flags.json`);
  return lines;
}
