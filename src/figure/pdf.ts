import PDFDocument from 'pdfkit';
import svgToPdf from 'svg-to-pdfkit';
import type { Provenance } from '../files/fits-scene.ts';

/** The fonts that a PDF embeds, TTF bytes. */
export interface PdfFonts {
  readonly regular: Uint8Array;
  readonly bold: Uint8Array;
}

/** A px of our figures is 1/96 inch, a point 1/72. */
const pointsPerPx = 0.75;
/** PDF asks for a date; a fixed one keeps a rerun the same to the byte. */
// eslint-disable-next-line no-restricted-globals -- a constant, not the clock
const undated = new Date(Date.UTC(2000, 0, 1));

/**
 * An SVG of this folder as a one-page PDF of its size: text stays text (searchable), in embedded
 * subsets of the fonts given; lines stay lines. The scene goes in as an attached file. The same
 * input gives the same bytes. Throws where the SVG has no size.
 */
export async function pdfFromSvg(svg: string, fonts: PdfFonts, title: string, provenance?: Provenance): Promise<Uint8Array> {
  const [width, height] = sizeOf(svg);
  const size: [number, number] = [width * pointsPerPx, height * pointsPerPx];
  const document = new PDFDocument({
    size,
    margin: 0,
    compress: true,
    // No standard font is wanted: all text is set in the embedded ones.
    font: '',
    info: { Title: title, Creator: `gyrelight${provenance ? ` ${provenance.version}` : ''}`, CreationDate: undated, ModDate: undated },
  });
  const parts: Uint8Array[] = [];
  document.on('data', (part: Uint8Array) => parts.push(part));
  const done = new Promise<void>((resolve, reject) => {
    document.on('end', () => resolve());
    document.on('error', reject);
  });
  document.registerFont('regular', fonts.regular as unknown as string);
  document.registerFont('bold', fonts.bold as unknown as string);
  document.scale(pointsPerPx);
  svgToPdf(document, svg, 0, 0, {
    assumePt: true,
    width,
    height,
    fontCallback: (_family, bold) => (bold ? 'bold' : 'regular'),
    warningCallback: () => undefined,
  });
  if (provenance) {
    const source = new TextEncoder().encode(provenance.sceneText);
    const dates = { creationDate: undated, modifiedDate: undated };
    document.file(source as unknown as string, { name: 'scene.yaml', type: 'text/yaml', description: `scene, seed ${provenance.seed}`, ...dates });
  }
  document.end();
  await done;
  return joined(parts);
}

function sizeOf(svg: string): readonly [number, number] {
  const found = /<svg\b[^>]*\bviewBox="0 0 ([\d.]+) ([\d.]+)"/.exec(svg);
  if (!found) throw new RangeError('the SVG has no viewBox from 0 0');
  return [Number(found[1]), Number(found[2])];
}

function joined(parts: readonly Uint8Array[]): Uint8Array {
  const whole = new Uint8Array(parts.reduce((sum, part) => sum + part.length, 0));
  let at = 0;
  for (const part of parts) {
    whole.set(part, at);
    at += part.length;
  }
  return whole;
}
