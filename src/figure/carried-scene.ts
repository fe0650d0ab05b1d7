import { escapeLines, unescapeLines } from '../files/escape-lines.ts';
import type { Provenance } from '../files/fits-scene.ts';
import { sha256OfText } from '../files/sha256.ts';
import { InputError } from '../units/input-error.ts';
import { chunk } from './png-image.ts';
import { escapeXml } from './svg.ts';

const keyword = 'gyrelight scene';
const element = 'gyrelight-scene';

/** The scene with version, seed and SHA-256 as one JSON text: what pictures carry. */
function carriedText({ sceneText, version, seed }: Provenance): string {
  return JSON.stringify({ version, seed, sha256: sha256OfText(sceneText), scene: escapeLines(sceneText) });
}

function readCarried(text: string, file: string): Provenance {
  const fail = (reason: string): never => {
    throw new InputError(`the scene that the picture carries ${reason}`, { file });
  };
  let value: Record<string, unknown>;
  try {
    value = JSON.parse(text) as Record<string, unknown>;
  } catch {
    return fail('is damaged: it is no JSON');
  }
  const { version, seed, sha256, scene } = value;
  if (typeof version !== 'string' || typeof seed !== 'number' || !Array.isArray(scene)) return fail('is not whole');
  const sceneText = unescapeLines(scene as string[]);
  if (sceneText === undefined) return fail('holds escapes that are not understood');
  if (sha256OfText(sceneText) !== sha256) return fail('does not have the SHA-256 stated beside it: it was changed or damaged');
  return { sceneText, version, seed };
}

/** An SVG with its scene in a metadata element, which viewers do not show. */
export function svgWithScene(svg: string, provenance: Provenance): string {
  const metadata = `<metadata id="${element}">${escapeXml(carriedText(provenance))}</metadata>`;
  return svg.replace(/<svg\b[^>]*>/, (head) => head + metadata);
}

/** The scene that an SVG carries; undefined where it carries none. Throws InputError where that is damaged. */
export function sceneOfSvg(svg: string, file: string): Provenance | undefined {
  const found = new RegExp(`<metadata id="${element}">([^<]*)</metadata>`).exec(svg);
  if (!found) return undefined;
  const entities: Readonly<Record<string, string>> = { amp: '&', lt: '<', gt: '>', quot: '"', '#39': "'" };
  return readCarried(found[1].replace(/&(amp|lt|gt|quot|#39);/g, (_, name: string) => entities[name]), file);
}

/** A PNG with its scene in an iTXt chunk before the end (PNG specification, section 11.3.3.4). */
export function pngWithScene(png: Uint8Array, provenance: Provenance): Uint8Array {
  const encoder = new TextEncoder();
  const head = [...encoder.encode(keyword), 0, 0, 0, 0, 0];
  const text = encoder.encode(carriedText(provenance));
  const data = new Uint8Array(head.length + text.length);
  data.set(head);
  data.set(text, head.length);
  const added = chunk('iTXt', data);
  const end = png.length - 12;
  const whole = new Uint8Array(png.length + added.length);
  whole.set(png.subarray(0, end));
  whole.set(added, end);
  whole.set(png.subarray(end), end + added.length);
  return whole;
}

/** The scene that a PNG carries; undefined where it carries none. Throws InputError where that is damaged. */
export function sceneOfPng(png: Uint8Array, file: string): Provenance | undefined {
  const view = new DataView(png.buffer, png.byteOffset, png.byteLength);
  const decoder = new TextDecoder();
  for (let at = 8; at + 12 <= png.length; ) {
    const length = view.getUint32(at);
    const data = png.subarray(at + 8, at + 8 + length);
    const isText = decoder.decode(png.subarray(at + 4, at + 8)) === 'iTXt';
    if (isText && decoder.decode(data.subarray(0, keyword.length)) === keyword && data[keyword.length] === 0) {
      return readCarried(decoder.decode(data.subarray(keyword.length + 5)), file);
    }
    at += 12 + length;
  }
  return undefined;
}
