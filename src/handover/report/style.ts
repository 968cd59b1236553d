/** The look of the report: ink on warm paper, one accent, hairlines; on paper white, and nothing that needs colour. */
export const STYLE = `
:root { --ink: #1d1b18; --quiet: #5b564d; --hairline: #d8d3c7; --accent: #0a6274; --paper: #fbf9f4; }
* { box-sizing: border-box; }
html { background: var(--paper); color: var(--ink); font: 10pt/1.42 system-ui, -apple-system, 'Segoe UI', 'DejaVu Sans', sans-serif; font-variant-numeric: tabular-nums; -webkit-print-color-adjust: exact; print-color-adjust: exact; }
body { max-width: 186mm; margin: 10mm auto; padding: 0 4mm; }
h1 { font-size: 19pt; line-height: 1.2; font-weight: 600; margin: 0 0 2mm; }
h2 { font-size: 12.5pt; font-weight: 600; margin: 6mm 0 1.5mm; break-after: avoid; }
h3 { font-size: 10pt; font-weight: 600; margin: 4mm 0 1mm; break-after: avoid; }
p { margin: 0 0 2mm; orphans: 3; widows: 3; overflow-wrap: anywhere; }
a { color: var(--accent); }
code { font: 0.86em/1.3 ui-monospace, Consolas, 'DejaVu Sans Mono', monospace; overflow-wrap: anywhere; }
i { font-style: italic; }
.quiet, figcaption { color: var(--quiet); }
.cautions { border: 1.4pt solid var(--ink); padding: 1.6mm 3mm; margin: 2mm 0 3mm; break-inside: avoid; }
.cautions p { margin: 0; font-weight: 600; }
table { width: 100%; border-collapse: collapse; margin: 0 0 2mm; font-size: 9pt; line-height: 1.32; }
th { text-align: left; font-weight: 600; vertical-align: bottom; border-bottom: 0.8pt solid var(--ink); padding: 0.6mm 1.6mm 0.6mm 0; break-after: avoid; }
td { vertical-align: top; border-bottom: 0.4pt solid var(--hairline); padding: 0.7mm 1.6mm 0.7mm 0; overflow-wrap: break-word; }
tr { break-inside: avoid; }
.number { text-align: right; white-space: nowrap; padding-left: 1.6mm; }
th.number { white-space: normal; }
td.number + td:not(.number), th.number + th:not(.number) { padding-left: 4mm; }
.dense { font-size: 7.6pt; line-height: 1.25; }
.dense:not(.flags) td:nth-child(2) { white-space: nowrap; }
.summed tbody tr:last-child td { border-top: 0.8pt solid var(--ink); border-bottom: 0; font-weight: 600; }
.flags td:nth-child(2) { white-space: nowrap; }
.flags td:nth-child(3) { width: 21%; }
.flags td:last-child { width: 56%; }
.named td:nth-child(-n+2) { white-space: nowrap; }
.reasons td:nth-child(2) { width: 42%; }
.reasons td:nth-child(3) { width: 41%; }
/* A foot would be repeated on every page that the table reaches. */
.balance { break-inside: avoid; }
.balance tfoot { display: table-row-group; }
.balance tfoot td { border-top: 0.8pt solid var(--ink); border-bottom: 2.4pt double var(--ink); font-weight: 600; }
.balance td:nth-child(3) { padding-left: 6mm; border-left: 0.8pt solid var(--ink); }
.blank td { height: 11mm; border-bottom: 0.8pt solid var(--ink); border-right: 0.4pt solid var(--hairline); }
.blank td:first-child { width: 26mm; vertical-align: bottom; }
.ruled { height: 8mm; border-bottom: 0.6pt solid var(--ink); }
.ruled + p, .ruled + table { margin-top: 6mm; }
.shape { font-weight: 400; }
.flag, .where { break-inside: avoid; }
.flag { white-space: nowrap; }
figure { margin: 2mm 0 3mm; break-inside: avoid; }
figcaption, .legend { font-size: 8.4pt; line-height: 1.35; margin: 0.5mm 0 0; }
.legend span { white-space: nowrap; margin-right: 3mm; }
svg { display: block; width: 100%; height: auto; overflow: visible; }
svg.key { display: inline-block; width: 5mm; height: 3.1mm; vertical-align: -0.4mm; }
svg.rank { width: 40mm; height: 2.6mm; }
svg.rank rect { fill: var(--ink); }
svg.patterns { position: absolute; }
svg text { font-size: 10px; fill: var(--ink); }
svg .axis { stroke: var(--ink); stroke-width: 0.8; fill: none; }
svg .across, svg .title, svg .mark { text-anchor: middle; }
svg .side, svg .limit-text { text-anchor: end; }
svg .title { fill: var(--quiet); }
svg .limit-text { paint-order: stroke; stroke: var(--paper); stroke-width: 3px; }
svg .cells { fill: none; stroke: var(--quiet); stroke-width: 0.5; }
svg .box { stroke: var(--ink); stroke-width: 0.6; }
svg .bar { fill: #96918a; stroke: var(--ink); stroke-width: 0.4; }
svg .band { fill: #c2beb5; }
svg .value { stroke: var(--ink); stroke-width: 1.6; fill: none; }
svg .limit { stroke: var(--ink); stroke-width: 0.8; stroke-dasharray: 5 3; fill: none; }
.sources { padding-left: 6mm; font-size: 9pt; }
.contents { columns: 2; padding-left: 5mm; margin: 0 0 2mm; }
@media print {
  :root { --paper: #fff; }
  html { background: none; font-size: 9.4pt; }
  body { max-width: none; margin: 0; padding: 0; }
  #sign-off { break-before: page; }
  .summary { break-after: page; font-size: 8.8pt; }
  .summary h2 { margin-top: 3mm; }
  .summary table { font-size: 8pt; line-height: 1.25; }
  .summary p { margin-bottom: 1.2mm; }
  a { color: inherit; text-decoration: none; }
}
`;

/** A4 with room for a head and a foot; browsers that know margin boxes number the pages. `head` is a CSS string already. */
export function pageStyle(head: string, foot: string): string {
  return `
@page { size: A4; margin: 15mm 14mm 15mm 16mm;
  @top-left { content: ${head}; font: 7.5pt system-ui, 'DejaVu Sans', sans-serif; color: #5b564d; }
  @bottom-left { content: ${foot}; font: 7.5pt system-ui, 'DejaVu Sans', sans-serif; color: #5b564d; }
  @bottom-right { content: counter(page) ' / ' counter(pages); font: 7.5pt system-ui, 'DejaVu Sans', sans-serif; color: #5b564d; } }
`;
}

/** A text as a CSS string: nothing in it can end the string, the rule, or the style element. */
export function cssString(text: string): string {
  return `"${[...text].map((sign) => (/[A-Za-z0-9 ,.;:()-]/.test(sign) ? sign : `\\${sign.codePointAt(0)!.toString(16)} `)).join('')}"`;
}
