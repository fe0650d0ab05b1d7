import { z } from 'zod';
import { InputError } from '../../units/input-error.ts';
import type { PageFiles } from '../store.ts';
import type { PageDocument } from './page-document.ts';
import { withoutKey } from './without-key.ts';

const version = 1;

const column = z.object({ id: z.string(), name: z.string(), scene: z.string(), hypothesis: z.record(z.string(), z.unknown()) });
const rowKind = z.enum(['shape', 'polarization', 'rotation-measure', 'ring', 'verdict']);
const fileSchema = z.object({
  'gyrelight-page': z.literal(version),
  title: z.string(),
  columns: z.array(column).min(1),
  chosen: z.string(),
  differenceFrom: z.string().optional(),
  rows: z.array(z.object({ kind: rowKind, band: z.number().int().optional() })),
  study: z.record(z.string(), z.unknown()),
  ringKpc: z.tuple([z.number(), z.number()]).optional(),
  shape: z.object({ turn: z.number(), tilt: z.number(), colourBy: z.enum(['strength', 'line-of-sight']) }),
  theme: z.enum(['light', 'dark']),
  files: z.record(z.string(), z.string()).default({}),
});

/** The page and its files as one text (JSON; files in base 64), which `readPageFile` reads back. */
export function writePageFile(page: PageDocument, files: PageFiles): string {
  const encoded = Object.fromEntries(Object.entries(files).map(([name, bytes]) => [name, toBase64(bytes)]));
  return `${JSON.stringify({ 'gyrelight-page': version, ...page, files: encoded }, null, 1)}\n`;
}

/** Reads what `writePageFile` wrote. Throws InputError where it is something else, or from a newer version. */
export function readPageFile(text: string, fileName: string): { readonly page: PageDocument; readonly files: PageFiles } {
  let value: unknown;
  try {
    value = JSON.parse(text);
  } catch {
    throw new InputError('this is no page file: it is no JSON', { file: fileName });
  }
  const stated = typeof value === 'object' && value !== null ? (value as Record<string, unknown>)['gyrelight-page'] : undefined;
  if (typeof stated === 'number' && stated > version) {
    throw new InputError(`the page was kept by a newer version (format ${stated}; this one reads ${version})`, { file: fileName });
  }
  const parsed = fileSchema.safeParse(value);
  if (!parsed.success) {
    const [issue] = parsed.error.issues;
    throw new InputError(`this is no page file: ${issue.path.join('.') || 'its top'}: ${issue.message}`, { file: fileName });
  }
  const { files, ...kept } = parsed.data;
  const page: PageDocument = withoutKey(kept, 'gyrelight-page');
  return { page, files: Object.fromEntries(Object.entries(files).map(([name, code]) => [name, fromBase64(code)])) };
}

function toBase64(bytes: Uint8Array): string {
  let text = '';
  for (let k = 0; k < bytes.length; k += 0x8000) text += String.fromCharCode(...bytes.subarray(k, k + 0x8000));
  return btoa(text);
}

function fromBase64(code: string): Uint8Array {
  const text = atob(code);
  return Uint8Array.from(text, (_, k) => text.charCodeAt(k));
}
