import { execFileSync } from 'node:child_process';
import { fileURLToPath } from 'node:url';
import type { TestContext } from 'vitest';
import { needPython } from '../support/tools.ts';

export interface DecodedPng {
  readonly width: number;
  readonly height: number;
  /** Bytes a pixel. */
  readonly size: number;
  readonly rows: readonly (readonly number[])[];
  readonly palette: readonly number[];
  readonly transparency: readonly number[];
}

/** What Python's zlib reads from a PNG; fails on a wrong CRC or length. */
export function decodePng(context: TestContext, png: Uint8Array): DecodedPng {
  needPython(context, 'zlib');
  const program = fileURLToPath(new URL('./png-decode.py', import.meta.url));
  return JSON.parse(execFileSync('/usr/bin/python3', [program], { input: png, encoding: 'utf8', maxBuffer: 1 << 28 })) as DecodedPng;
}

/** The PNG in the first image element of an SVG. */
export function embeddedPng(svg: string): Uint8Array {
  const [, base64] = /href="data:image\/png;base64,([^"]+)"/.exec(svg) ?? [];
  return Uint8Array.from(Buffer.from(base64, 'base64'));
}
