import type { Bundle } from '../open-bundle';
import { columnsSection } from './columns-section';
import { conditioningSection } from './conditioning-section';
import { driftSection } from './drift-section';
import { flagsSection } from './flags-section';
import { PATTERNS } from './frame';
import { ledgerSection } from './ledger-section';
import { Markup, markup } from './markup';
import { matrixSection } from './matrix-section';
import { methodSection } from './method-section';
import { nextSection } from './next-section';
import { priorSection } from './prior-section';
import { provenanceSection } from './provenance-section';
import { referenceSection } from './reference-section';
import { reportSource, type ReportSource } from './report-source';
import type { Section } from './section';
import { signOff } from './sign-off';
import { studySection } from './study-section';
import { cssString, pageStyle, STYLE } from './style';
import { summaryPage } from './summary';

const SECTIONS: readonly Section[] = [
  nextSection,
  studySection,
  ledgerSection,
  matrixSection,
  columnsSection,
  flagsSection,
  priorSection,
  referenceSection,
  driftSection,
  conditioningSection,
  provenanceSection,
  methodSection,
  signOff,
];

/**
 * The report of a bundle as one HTML document that refers to nothing outside itself and runs no script: first page
 * which columns may be trusted, why, and what must still be measured; then everything that stands behind it. The same bundle gives the
 * same bytes. Throws `InputError` where the bundle is damaged.
 */
export function reportHtml(bundle: Bundle): string {
  const source = reportSource(bundle);
  return `<!doctype html>\n${documentOf(source).text}\n`;
}

function documentOf(source: ReportSource): Markup {
  const { title } = source.bundle.study;
  const { program, study } = source.bundle.manifest;
  const foot = `${program.name} ${program.version}, study ${study.fingerprint.slice(0, 12)}`;
  const style = new Markup(STYLE + pageStyle(cssString(title), cssString(foot)));
  const contents = SECTIONS.map(({ id, title }) => markup`<li><a href="#${id}">${title}</a></li>`);
  return markup`<html lang="en"><head><meta charset="utf-8"><meta name="viewport" content="width=device-width">
<meta http-equiv="Content-Security-Policy" content="default-src 'none'; style-src 'unsafe-inline'">
<title>${title}: report</title><style>${style}</style></head><body>${PATTERNS}
${summaryPage(source)}<nav><h2>Contents</h2><ol class="contents">${contents}</ol></nav>
${SECTIONS.map(
  ({ id, title, body }, i) => markup`<section id="${id}"><h2>${i + 1}. ${title}</h2>
${body(source)}</section>
`,
)}</body></html>`;
}
