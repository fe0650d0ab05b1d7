import { expect } from 'vitest';
import type { TestContext } from 'vitest';
import { needPython, runPython } from '../support/tools.ts';

/** The text is XML to Python's expat; the message of the parser fails the test. */
export function expectWellFormed(context: TestContext, text: string): void {
  needPython(context, 'xml.dom.minidom');
  const code = 'import sys\nfrom xml.dom.minidom import parseString\nparseString(sys.stdin.buffer.read()); print("well formed")';
  expect(runPython(code, [], text).trim()).toBe('well formed');
}
