import { describe, expect, it } from 'vitest';
import { clipped, element, escapeXml, fixed, polyline, svgDocument, textElement } from '../../src/figure/svg.ts';
import { expectWellFormed } from './well-formed.ts';

describe('SVG text', () => {
  it('escapes what XML gives a meaning', () => {
    expect(escapeXml(`a<b> & "c" 'd'`)).toBe('a&lt;b&gt; &amp; &quot;c&quot; &#39;d&#39;');
  });

  it('replaces what XML 1.0 forbids and keeps the rest of Unicode', (context) => {
    const nasty = 'x\u0000\u0007\ud800y \u{1d4d1} µ \ufffe';
    expect(escapeXml(nasty)).toBe('x\ufffd\ufffd\ufffdy \u{1d4d1} µ \ufffd');
    expectWellFormed(context, element('a', { b: nasty }, escapeXml(nasty)));
  });

  it('writes coordinates without exponents, trailing zeros or -0, and refuses NaN', () => {
    expect([1, 1.5, 1.005, -0.001, 1e-9, 1234567.891, 100].map((x) => fixed(x))).toEqual(['1', '1.5', '1', '0', '0', '1234567.89', '100']);
    expect(() => fixed(NaN)).toThrow(RangeError);
  });

  it('leaves undefined attributes out', () => {
    expect(element('rect', { x: 1.239, fill: undefined })).toBe('<rect x="1.24"/>');
    expect(polyline([[0, 1], [2.345678, 3]], true)).toBe('M0,1L2.35,3Z');
  });

  it('makes a whole picture with hostile text that stays well formed', (context) => {
    const body = clipped(textElement(1, 2, '</text><script>&', { fill: '"red' }), 10, 10);
    const svg = svgDocument({ width: 10, height: 10, body }, { title: '<&>', description: '"]]>', ink: '#000', paper: '#fff' });
    expectWellFormed(context, svg);
    expect(svg).not.toContain('<script');
  });
});
