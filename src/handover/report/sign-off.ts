import { CAUTIONS } from '../cautions';
import { markup, Markup, tableOf } from './markup';
import type { ReportSource } from './report-source';
import type { Section } from './section';

/** The cautions once more, and blank lines for those who answer for the matrix. */
export const signOff: Section = { id: 'sign-off', title: 'Cautions and sign-off', body };

const LINES = ['Prepared by', 'Checked by', 'Approved by'];

function body({ manifestHash }: ReportSource): Markup {
  const lines = LINES.map((role) => [role, '', '', '']);
  return markup`<aside class="cautions">${CAUTIONS.map((line) => markup`<p>${line}</p>`)}</aside>
<p>Systematic effects considered, and where they are described:</p><div class="ruled"></div><div class="ruled"></div><div class="ruled"></div>
<p>Columns released for use, and conditions:</p><div class="ruled"></div><div class="ruled"></div>
${tableOf(['', 'Name', 'Date', 'Signature'], lines, { kind: 'blank' })}
<p class="quiet">This sheet belongs to the bundle whose manifest has SHA-256 <code>${manifestHash}</code>.</p>`;
}
