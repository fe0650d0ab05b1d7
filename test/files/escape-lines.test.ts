import fc from 'fast-check';
import { expect, test } from 'vitest';
import { escapeLines, unescapeLines } from '../../src/files/escape-lines.ts';
import { SCENE_TEXT } from './samples.ts';

/** Any UTF-16 text, lone surrogates and controls included, with many of the characters that need care. */
const anyText = fc
  .array(fc.oneof(fc.constantFrom('\\', ' ', '\n', '\r', '\t', 'u0041', 'é', '🌌', 'a'.repeat(70)), fc.integer({ min: 0, max: 0xffff }).map((code) => String.fromCharCode(code))))
  .map((parts) => parts.join(''));

test('any text comes back, from lines that a FITS column can hold', () => {
  fc.assert(
    fc.property(anyText, (text) => {
      const lines = escapeLines(text);
      expect(unescapeLines(lines)).toBe(text);
      for (const line of lines) expect(line).toMatch(/^(?:[ -~]{0,119}[!-~])?$/);
    }),
    { seed: 1, numRuns: 500 },
  );
  expect(unescapeLines(escapeLines(SCENE_TEXT))).toBe(SCENE_TEXT);
});

test('plain lines stay as they are', () => {
  expect(escapeLines('a: 1\n\n  b: [2, "x"]')).toEqual(['a: 1', '', '  b: [2, "x"]']);
});

test('what is no such escape is refused', () => {
  for (const lines of [['a\\x'], ['\\u12g4'], ['ends in \\'], []]) expect(unescapeLines(lines)).toBeUndefined();
});
