import { formatCount, formatNumber } from '../../audit/wording';
import type { Ledger } from '../../tally/ledger';
import { at, GREYS, HATCHES, legendOf, WIDTH } from './frame';
import { markup, Markup, tableOf } from './markup';
import type { ReportSource } from './report-source';
import { figure, plural, type Section } from './section';
import { withShare } from './summary';

/** Where every row went: an account whose two sides agree. */
export const ledgerSection: Section = { id: 'ledger', title: 'The ledger', body: ledger };

function ledger({ bundle }: ReportSource): Markup {
  const { ledger, duplicates } = bundle.manifest;
  const reasons = Object.entries(ledger.reasons).sort(([, a], [, b]) => b - a);
  return markup`<p>Every row that was read is in exactly one place. Both sides of the account agree. File by file: <a href="#provenance">Hashes and seed</a>.</p>
${balance(ledger)}${figure(bar(ledger), legendOf(PLACES.filter(({ of }) => of(ledger) > 0).map(({ fill, text }) => ({ fill, text }))))}
${
  reasons.length === 0
    ? null
    : tableOf(
        ['Rejected because', 'Rows'],
        reasons.map(([reason, rows]) => [reason, formatCount(rows)]),
        { numeric: [1] },
      )
}
${clamped(ledger)}${duplicates ? markup`<p>${duplicateWords(duplicates)}</p>` : null}`;
}

const PLACES: { text: string; fill: string; of: (ledger: Ledger) => number }[] = [
  { text: 'tallied', fill: GREYS[1], of: ({ tallied }) => tallied },
  { text: 'cut', fill: HATCHES[2], of: ({ cut }) => cut },
  { text: 'rejected', fill: GREYS[5], of: ({ rejected }) => rejected },
  { text: 'unmatched', fill: HATCHES[4], of: ({ unmatched }) => unmatched },
];

function balance(ledger: Ledger): Markup {
  const { read, cut, rejected, unmatched, tallied } = ledger;
  const right: [string, number][] = [
    ['cut by the study', cut],
    ['rejected, each with its reason', rejected],
    ...(unmatched > 0 ? [['without true value, counted apart', unmatched] as [string, number]] : []),
    ['tallied', tallied],
  ];
  const rows = right.map(
    ([text, n], i) =>
      markup`<tr><td>${i === 0 ? 'rows read' : ''}</td><td class="number">${i === 0 ? formatCount(read) : ''}</td><td>${text}</td><td class="number">${withShare(n, read)}</td></tr>`,
  );
  const sum = cut + rejected + unmatched + tallied;
  return markup`<table class="balance"><tbody>${rows}</tbody><tfoot><tr><td>sum</td><td class="number">${formatCount(read)}</td><td>sum</td><td class="number">${formatCount(sum)}</td></tr></tfoot></table>`;
}

const BAR = { height: 16, left: 1 };

function bar(ledger: Ledger): Markup {
  let left = BAR.left;
  const room = WIDTH - 2 * BAR.left;
  const boxes = PLACES.map(({ fill, of }) => {
    const width = ledger.read > 0 ? (room * of(ledger)) / ledger.read : 0;
    const box = markup`<rect class="box" x="${at(left)}" y="1" width="${at(width)}" height="${BAR.height}" fill="${fill}"/>`;
    left += width;
    return box;
  });
  return markup`<svg viewBox="0 0 ${WIDTH} ${BAR.height + 2}" role="img" aria-label="Shares of the rows read">${boxes}</svg>`;
}

function clamped({ clamped }: Ledger): Markup | null {
  if (clamped.cells === 0) return null;
  return markup`<p>Set aside: weight ${formatNumber(clamped.weight)} in ${formatCount(clamped.cells)} ${plural(clamped.cells, 'cell')} whose weight is not positive though they have events.</p>`;
}

function duplicateWords({
  identities,
  rows,
  examples,
}: {
  identities: number;
  rows: number;
  examples: string[][];
}): string {
  if (identities === 0) return 'Event identities were read; none repeats within its run.';
  const first = examples[0] ? `, for instance ${examples[0].join(' and ')}` : '';
  return `${formatCount(identities)} event ${plural(identities, 'identity', 'identities')} repeat within a run: ${formatCount(rows)} ${plural(rows, 'row')} too many${first}.`;
}
