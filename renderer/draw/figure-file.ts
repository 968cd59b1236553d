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

/**
 * One SVG document of every drawing inside `frame`: canvases become images, SVG elements keep their computed style.
 * The background is that of the page.
 */
export function svgText(frame: HTMLElement, title: string, description: string): string {
  const box = frame.getBoundingClientRect();
  const root = document.createElementNS(SVG, 'svg');
  set(root, { xmlns: SVG, width: box.width, height: box.height, viewBox: `0 0 ${box.width} ${box.height}` });
  root.append(words('title', title), words('desc', description));
  const paper = getComputedStyle(frame).getPropertyValue('--paper');
  root.append(set(document.createElementNS(SVG, 'rect'), { width: box.width, height: box.height, fill: paper }));
  for (const drawing of frame.querySelectorAll<HTMLCanvasElement | SVGSVGElement>('canvas, svg')) {
    if (drawing.parentElement?.closest('svg')) continue;
    root.append(drawing instanceof HTMLCanvasElement ? imageOf(drawing, box) : groupOf(drawing, box));
  }
  return new XMLSerializer().serializeToString(root);
}

/** The same picture as a PNG. */
export async function pngBytes(svg: string, width: number, height: number): Promise<Uint8Array<ArrayBuffer>> {
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

function words(name: 'title' | 'desc', text: string): SVGElement {
  const element = document.createElementNS(SVG, name);
  element.textContent = text;
  return element;
}

function set<E extends Element>(element: E, attributes: Record<string, string | number>): E {
  for (const [name, value] of Object.entries(attributes)) element.setAttribute(name, String(value));
  return element;
}
