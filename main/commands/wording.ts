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

/** Places printed of one flag; the rest are counted, and stand in flags.json. */
const MOST_PLACES = 4;

/** The flags that are raised, by answer and id: a filled triangle flagged, an open ring undecided, evidence, advice. */
export function flagLines(flags: readonly Flag[]): string[] {
  return (['flagged', 'undecided'] as const).flatMap((state) => {
    const raised = flags.filter((flag) => flag.state === state);
    const ids = [...new Set(raised.map(({ id }) => id))];
    return ids.flatMap((id) =>
      groupLines(
        state,
        id,
        raised.filter((flag) => flag.id === id),
      ),
    );
  });
}

function groupLines(state: 'flagged' | 'undecided', id: string, group: Flag[]): string[] {
  const lines = [`  ${state === 'flagged' ? '▲' : '○'} ${id}${group.length > 1 ? ` (${group.length} places)` : ''}`];
  for (const { column, bin, evidence, advice } of group.slice(0, MOST_PLACES)) {
    const place = column ?? (bin === null ? null : `bin ${bin}`);
    const words = [evidence, advice].filter((text) => text !== '').join('; ');
    lines.push(`      ${place === null ? words : `${shortNumbers(place)}: ${words}`}`);
  }
  if (group.length > MOST_PLACES) lines.push(`      and ${group.length - MOST_PLACES} more in flags.json`);
  return lines;
}

/** Edges are named to the last digit; a reader of a terminal needs six. */
function shortNumbers(name: string): string {
  return name.replace(/-?\d+\.\d{6,}(e[-+]?\d+)?/g, (text) => String(Number(Number(text).toPrecision(6))));
}
