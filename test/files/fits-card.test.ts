import fc from 'fast-check';
import { describe, expect, test } from 'vitest';
import { joinContinued, parseCard } from '../../src/files/fits-card-read.ts';
import { asciiText, cardLines } from '../../src/files/fits-card-write.ts';
import type { Card } from '../../src/files/fits-types.ts';

const reread = (card: Card): Card[] => joinContinued(cardLines(card).map(parseCard));

describe('writing', () => {
  test('fixed format: strings from column 11, numbers and logicals end in column 30 (FITS 4.0, section 4.2)', () => {
    expect(cardLines({ keyword: 'BUNIT', value: 'Jy' })[0].slice(0, 20)).toBe("BUNIT   = 'Jy      '");
    expect(cardLines({ keyword: 'SIMPLE', value: true })[0].slice(0, 30)).toBe(`SIMPLE  = ${'T'.padStart(20)}`);
    expect(cardLines({ keyword: 'CDELT1', value: -1.5e-7 })[0].slice(0, 30)).toBe(`CDELT1  = ${'-1.5E-7'.padStart(20)}`);
    expect(cardLines({ keyword: 'NAXIS', value: 3, comment: 'axes' })[0]).toBe(`NAXIS   = ${'3'.padStart(20)} / axes`.padEnd(80));
  });

  test('a long comment is cut at the end of the card, a long COMMENT wrapped between words', () => {
    expect(cardLines({ keyword: 'A', value: 1, comment: 'x'.repeat(90) })).toEqual([`A       = ${'1'.padStart(20)} / ${'x'.repeat(47)}`]);
    const words = Array.from({ length: 40 }, (_, i) => `word${i}`).join(' ');
    const lines = cardLines({ keyword: 'COMMENT', comment: words });
    expect(lines.length).toBeGreaterThan(3);
    expect(lines.map((line) => line.slice(8).trim()).join(' ')).toBe(words);
  });

  test('what no header can hold is refused', () => {
    for (const card of [
      { keyword: 'lower', value: 1 },
      { keyword: 'NINELETTERS', value: 1 },
      { keyword: 'A', value: NaN },
      { keyword: 'A', value: 'µG' },
      { keyword: 'A', value: 1, comment: 'a\nb' },
      { keyword: 'A', malformed: '1..2' },
    ]) {
      expect(() => cardLines(card)).toThrow(RangeError);
    }
    expect(asciiText('Ørsted é\n 銀')).toBe('?rsted e ?');
  });
});

describe('reading', () => {
  const valueOf = (text: string): Card => parseCard(`KEY     = ${text}`.padEnd(80));

  test('free format: D exponents, comments, doubled quotes, leading and trailing blanks', () => {
    expect(valueOf('1.5D3/ c')).toEqual({ keyword: 'KEY', value: 1500, comment: 'c' });
    expect(valueOf(" ' it''s / here ' / and there")).toEqual({ keyword: 'KEY', value: " it's / here", comment: 'and there' });
    expect(valueOf('  F')).toEqual({ keyword: 'KEY', value: false });
    expect(valueOf('-.5E+01').value).toBe(-5);
    expect(valueOf('')).toEqual({ keyword: 'KEY' });
    expect(valueOf('/ nothing')).toEqual({ keyword: 'KEY', comment: 'nothing' });
  });

  test('what is no value is kept as it stands', () => {
    for (const text of ['nan', '1..2', "'open", '(1.0, 2.0)', '1E999']) expect(valueOf(text).malformed).toBe(text);
  });

  test('an & without CONTINUE belongs to the string; CONTINUE without & continues nothing', () => {
    expect(joinContinued([valueOf("'a&'"), parseCard('COMMENT b')])[0].value).toBe('a&');
    expect(joinContinued([valueOf("'a'"), parseCard("CONTINUE  'b'")])[0].value).toBe('a');
  });
});

describe('write, then read', () => {
  const keyword = 'ANYWORD';
  test('strings of any length', () => {
    const text = fc.string({ unit: fc.constantFrom("'", '&', '/', ' ', 'a', '~', '!'), maxLength: 300 }).map((s) => s.trimEnd());
    fc.assert(
      fc.property(text, (value) => {
        const lines = cardLines({ keyword, value, comment: 'c' });
        for (const line of lines) expect(line).toHaveLength(80);
        expect(reread({ keyword, value })).toEqual([{ keyword, value }]);
      }),
      { seed: 2, numRuns: 500 },
    );
  });

  test('numbers to the last bit', () => {
    fc.assert(
      fc.property(fc.double({ noNaN: true, noDefaultInfinity: true }), (value) => {
        expect(reread({ keyword, value })[0].value).toBe(value);
      }),
      { seed: 3, numRuns: 500 },
    );
  });
});
