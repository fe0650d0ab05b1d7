/** A piece of a picture: SVG elements with the room they need, px. */
export interface Drawing {
  readonly width: number;
  readonly height: number;
  readonly body: string;
}

/** Attributes of an element; numbers are written with at most two decimals, undefined ones left out. */
export type Attributes = Readonly<Record<string, string | number | undefined>>;

/** System fonts first; DejaVu Sans is the one that PNG and PDF embed. */
export const FONT_FAMILY = "system-ui, -apple-system, 'Segoe UI', 'DejaVu Sans', sans-serif";

const ENTITIES: Readonly<Record<string, string>> = {
  '&': '&amp;', '<': '&lt;', '>': '&gt;', '"': '&quot;', "'": '&#39;',
};

/** Exactly what XML 1.0 forbids: control characters and halves of surrogate pairs. */
const FORBIDDEN =
  /[\u0000-\u0008\u000b\u000c\u000e-\u001f\ufffe\uffff]|[\ud800-\udbff](?![\udc00-\udfff])|(?<![\ud800-\udbff])[\udc00-\udfff]/g;

/** Text made safe for XML and HTML, elements and quoted attributes; characters that XML 1.0 forbids become U+FFFD. */
export function escapeXml(text: string): string {
  return text
    .replace(FORBIDDEN, '\ufffd')
    .replace(/[&<>"']/g, (character) => ENTITIES[character]);
}

/** A coordinate as text: at most `digits` decimals, never an exponent or -0, so that a rerun gives the same bytes. */
export function fixed(value: number, digits = 2): string {
  if (!Number.isFinite(value)) throw new RangeError(`a picture needs finite coordinates, got ${value}`);
  const text = value.toFixed(digits);
  const short = text.includes('.') ? text.replace(/\.?0+$/, '') : text;
  return short === '-0' ? '0' : short;
}

/** One element; `children` is markup already. */
export function element(name: string, attributes: Attributes, children?: string): string {
  const written = Object.entries(attributes)
    .filter(([, value]) => value !== undefined)
    .map(([key, value]) => ` ${key}="${typeof value === 'number' ? fixed(value) : escapeXml(String(value))}"`)
    .join('');
  return children === undefined ? `<${name}${written}/>` : `<${name}${written}>${children}</${name}>`;
}

/** A text element; `attributes` may set font-size, text-anchor, fill and so on. */
export function textElement(x: number, y: number, content: string, attributes: Attributes = {}): string {
  return element('text', { x, y, ...attributes }, escapeXml(content));
}

/** Markup moved by (x, y) px. */
export function moved(body: string, x: number, y: number): string {
  return element('g', { transform: `translate(${fixed(x)},${fixed(y)})` }, body);
}

/** Markup cut off at a rectangle from (0, 0); needs no ids, so pictures can share a page. */
export function clipped(body: string, width: number, height: number): string {
  return element('svg', { x: 0, y: 0, width, height, overflow: 'hidden' }, body);
}

/** Path text of a polyline through points given in px. */
export function polyline(points: readonly (readonly [number, number])[], closed = false): string {
  return points.map(([x, y], k) => `${k ? 'L' : 'M'}${fixed(x)},${fixed(y)}`).join('') + (closed ? 'Z' : '');
}

/** Estimated width of text in px; DejaVu Sans is the widest of the usual fonts, so others fit too. */
export function textWidth(text: string, sizePx: number): number {
  let em = 0;
  for (const character of text) {
    if (/[\s.,:;'|!ijl()[\]/·″′]/.test(character)) em += 0.34;
    else if (/[mwMW—%@]/.test(character)) em += 0.95;
    else if (/[A-Z±×−+=<>χΔ]/.test(character)) em += 0.74;
    else if (/[⁰-⁹⁻¹²³]/.test(character)) em += 0.42;
    else em += 0.63;
  }
  return em * sizePx;
}

/** What a whole picture says beside its drawing. */
export interface DocumentOptions {
  /** The picture in a few words, read aloud in its place. */
  readonly title: string;
  readonly description?: string;
  readonly ink: string;
  /** Ground; undefined leaves it to what lies under the picture. */
  readonly paper?: string;
}

/** The whole SVG text of a drawing, 11 px base type. */
export function svgDocument(drawing: Drawing, options: DocumentOptions): string {
  const { width, height } = drawing;
  const ground = options.paper ? element('rect', { width, height, fill: options.paper }) : '';
  const description = options.description ? element('desc', {}, escapeXml(options.description)) : '';
  return element(
    'svg',
    {
      xmlns: 'http://www.w3.org/2000/svg',
      role: 'img',
      'aria-label': options.title,
      width,
      height,
      viewBox: `0 0 ${fixed(width)} ${fixed(height)}`,
      'font-family': FONT_FAMILY,
      'font-size': 11,
      fill: options.ink,
    },
    element('title', {}, escapeXml(options.title)) + description + ground + drawing.body,
  );
}
