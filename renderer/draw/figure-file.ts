/** Style properties that a saved drawing must carry with it: the page's style sheet stays behind. */
const CARRIED = [
  'fill',
  'fill-opacity',
  'stroke',
  'stroke-width',
  'stroke-dasharray',
  'stroke-opacity',
  'opacity',
  'font-family',
  'font-size',
  'font-weight',
  'font-variant-numeric',
  'text-anchor',
  'shape-rendering',
  'display',
  'visibility',
] as const;

/** Device pixels a CSS pixel in a saved PNG: prints sharp at 300 dots an inch. */
const PNG_SCALE = 3;
const SVG = 'http://www.w3.org/2000/svg';

/** What a saved picture is made of. */
export interface FigureParts {
  /** Holds the drawings. */
  frame: HTMLElement;
  /** Keys to colours beside the title: each a drawing and a text. */
  legends: Iterable<HTMLElement>;
  title: string;
  description: string;
}

export interface SavedFigure {
  svg: string;
  width: number;
  height: number;
}

/** Above the picture: the title and the legends. */
const HEAD = 36;
const HEAD_TEXT = 16;
const MARGIN = 12;

/**
 * One SVG document of the title, the legends and every drawing inside the frame: canvases become images, SVG elements
 * keep their computed style. The background is that of the page.
 */
export function savedFigure({ frame, legends, title, description }: FigureParts): SavedFigure {
  const box = frame.getBoundingClientRect();
  const [width, height] = [box.width + 2 * MARGIN, box.height + HEAD + 2 * MARGIN];
  const style = getComputedStyle(frame);
  const root = set(document.createElementNS(SVG, 'svg'), {
    xmlns: SVG,
    width,
    height,
    viewBox: `0 0 ${width} ${height}`,
  });
  root.append(words('title', title), words('desc', description));
  root.append(set(document.createElementNS(SVG, 'rect'), { width, height, fill: style.getPropertyValue('--paper') }));
  root.append(headOf(title, legends, style));
  const body = set(document.createElementNS(SVG, 'g'), { transform: `translate(${MARGIN},${HEAD + MARGIN})` });
  for (const drawing of frame.querySelectorAll<HTMLCanvasElement | SVGSVGElement>('canvas, svg')) {
    if (drawing.parentElement?.closest('svg')) continue;
    body.append(drawing instanceof HTMLCanvasElement ? imageOf(drawing, box) : groupOf(drawing, box));
  }
  root.append(body);
  return { svg: new XMLSerializer().serializeToString(root), width, height };
}

/** The title, and behind it the legends one after another. */
function headOf(title: string, legends: Iterable<HTMLElement>, style: CSSStyleDeclaration): SVGElement {
  const head = set(document.createElementNS(SVG, 'g'), { transform: `translate(${MARGIN},${MARGIN})` });
  const text = words('text', title);
  set(text, { y: HEAD_TEXT, fill: style.color, 'font-family': style.fontFamily, 'font-size': style.fontSize });
  head.append(set(text, { 'font-weight': 600 }));
  let x = title.length * (Number.parseFloat(style.fontSize) * 0.65) + 2 * MARGIN;
  for (const legend of legends) {
    const box = legend.getBoundingClientRect();
    const group = set(document.createElementNS(SVG, 'g'), { transform: `translate(${x},0)` });
    for (const svg of legend.querySelectorAll<SVGSVGElement>('svg')) group.append(groupOf(svg, box));
    for (const span of legend.querySelectorAll<HTMLElement>('span')) group.append(labelOf(span, box));
    head.append(group);
    x += box.width + MARGIN;
  }
  return head;
}

function labelOf(span: HTMLElement, frame: DOMRect): SVGElement {
  const box = span.getBoundingClientRect();
  const { color, fontFamily, fontSize } = getComputedStyle(span);
  const text = words('text', span.textContent ?? '');
  return set(text, { x: box.x - frame.x, y: HEAD_TEXT, fill: color, 'font-family': fontFamily, 'font-size': fontSize });
}

/** The same picture as a PNG. */
export async function pngBytes({ svg, width, height }: SavedFigure): Promise<Uint8Array<ArrayBuffer>> {
  const url = URL.createObjectURL(new Blob([svg], { type: 'image/svg+xml' }));
  try {
    const image = new Image();
    image.src = url;
    await image.decode();
    const canvas = new OffscreenCanvas(Math.round(width * PNG_SCALE), Math.round(height * PNG_SCALE));
    canvas.getContext('2d')!.drawImage(image, 0, 0, canvas.width, canvas.height);
    const blob = await canvas.convertToBlob({ type: 'image/png' });
    return new Uint8Array(await blob.arrayBuffer());
  } finally {
    URL.revokeObjectURL(url);
  }
}

function imageOf(canvas: HTMLCanvasElement, frame: DOMRect): SVGElement {
  const box = canvas.getBoundingClientRect();
  const image = document.createElementNS(SVG, 'image');
  set(image, { x: box.x - frame.x, y: box.y - frame.y, width: box.width, height: box.height });
  image.setAttribute('href', canvas.toDataURL('image/png'));
  return image;
}

function groupOf(svg: SVGSVGElement, frame: DOMRect): SVGElement {
  const box = svg.getBoundingClientRect();
  const group = document.createElementNS(SVG, 'g');
  group.setAttribute('transform', `translate(${box.x - frame.x},${box.y - frame.y})`);
  for (const child of svg.children) group.append(carried(child));
  return group;
}

function carried(element: Element): Element {
  const copy = element.cloneNode(false) as Element;
  for (const name of ['class', 'tabindex', 'role']) copy.removeAttribute(name);
  const style = getComputedStyle(element);
  if (element instanceof SVGElement) for (const name of CARRIED) carry(copy, name, style.getPropertyValue(name));
  for (const child of element.childNodes) {
    if (child instanceof Element) copy.append(carried(child));
    else if (child.nodeType === Node.TEXT_NODE) copy.append(child.cloneNode());
  }
  return copy;
}

function carry(element: Element, name: string, value: string): void {
  if (value !== '' && value !== 'normal' && value !== 'inline' && value !== 'visible')
    element.setAttribute(name, value);
}

function words(name: 'title' | 'desc' | 'text', text: string): SVGElement {
  const element = document.createElementNS(SVG, name);
  element.textContent = text;
  return element;
}

function set<E extends Element>(element: E, attributes: Record<string, string | number>): E {
  for (const [name, value] of Object.entries(attributes)) element.setAttribute(name, String(value));
  return element;
}
