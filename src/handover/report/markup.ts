/** Text that is markup already: `markup` takes it in as it is, and escapes everything else. */
export class Markup {
  constructor(readonly text: string) {}
}

type Piece = Markup | string | number | null | readonly Piece[];

/**
 * Markup from a template: texts and numbers are escaped, lists joined, `null` is nothing. What a user wrote can
 * therefore never become an element, an attribute or a reference of its own.
 */
export function markup(strings: TemplateStringsArray, ...pieces: readonly Piece[]): Markup {
  return new Markup(strings.reduce((text, part, i) => text + rendered(pieces[i - 1]!) + part));
}

function rendered(piece: Piece): string {
  if (piece === null) return '';
  if (piece instanceof Markup) return piece.text;
  return typeof piece === 'object' ? piece.map(rendered).join('') : escaped(String(piece));
}

const ENTITIES: Record<string, string> = { '&': '&amp;', '<': '&lt;', '>': '&gt;', '"': '&quot;', "'": '&#39;' };

function escaped(text: string): string {
  // Control characters are no part of HTML; a mark shows where they stood.
  // eslint-disable-next-line no-control-regex
  return text.replace(/[&<>"']/g, (sign) => ENTITIES[sign]!).replace(/[\u0000-\u0008\u000b-\u001f\u007f]/g, '\ufffd');
}

/** A table: its head, and rows of cells. `numeric` names the columns whose cells are set to the right. */
export function tableOf(
  head: readonly Piece[],
  rows: readonly (readonly Piece[])[],
  options: { numeric?: readonly number[]; kind?: string } = {},
): Markup {
  const side = (i: number): string | null => (options.numeric?.includes(i) ? 'number' : null);
  const cell = (piece: Piece, i: number): Markup => markup`<td class="${side(i)}">${piece}</td>`;
  return markup`<table class="${options.kind ?? 'plain'}"><thead><tr>${head.map(
    (title, i) => markup`<th class="${side(i)}">${title}</th>`,
  )}</tr></thead><tbody>${rows.map(
    (row) => markup`<tr>${row.map(cell)}</tr>
`,
  )}</tbody></table>`;
}
