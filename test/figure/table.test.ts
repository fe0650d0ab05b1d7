import { describe, expect, it } from 'vitest';
import { chi2Text, deltaAicText, ranked, rankingTable, textTable } from '../../src/figure/table.ts';

const rows = [
  { name: 'disc alone', chi2PerN: 41.4, deltaAic: 98214, decidedBy: 'RM on the minor axis' },
  { name: 'helical halo', chi2PerN: 1.0234, deltaAic: 0 },
  { name: 'cored quadrupole', chi2PerN: 1.31, deltaAic: 412.7, decidedBy: '1.4 GHz, azimuth 150°–240°' },
];

describe('tables for the terminal', () => {
  it('rank as the design of the page shows it, points under each other', () => {
    expect(rankingTable(rows)).toBe(
      [
        '    hypothesis          χ²/N      Δ AIC   decided by',
        '  1 helical halo        1.02        0.0',
        '  2 cored quadrupole    1.31     +412.7   1.4 GHz, azimuth 150°–240°',
        '  3 disc alone         41.4    +98214     RM on the minor axis',
      ].join('\n'),
    );
  });

  it('put what has no number last', () => {
    const unknown = { name: 'failed', chi2PerN: NaN, deltaAic: NaN };
    expect(ranked([unknown, ...rows]).map((row) => row.name)).toEqual(['helical halo', 'cored quadrupole', 'disc alone', 'failed']);
    expect(rankingTable([unknown, ...rows]).split('\n').at(-1)).toMatch(/^ {2}4 failed +— +—$/);
  });

  it('write as many decimals as mean something', () => {
    expect([0.987, 9.994, 9.996, 99.94, 99.96, NaN].map(chi2Text)).toEqual(['0.99', '9.99', '10.0', '99.9', '100', '—']);
    expect([0, 0.04, 3, 999.94, 999.96, -2].map(deltaAicText)).toEqual(['0.0', '0.0', '+3.0', '+999.9', '+1000', '−2.0']);
  });

  it('keep columns straight under wide and combining characters and disarm control characters', () => {
    const lines = textTable([{ title: 'name', align: 'left' }, { title: 'x', align: 'right' }], [['星雲', '1'], ['e\u0301te', '22'], ['a\u001b[31m', '3']], 0).split('\n');
    expect(lines).toEqual(['name      x', '星雲      1', 'e\u0301te      22', 'a [31m    3']);
  });

  it('refuse a row of the wrong length', () => {
    expect(() => textTable([{ title: 'a', align: 'left' }], [['1', '2']])).toThrow(/2 cells for 1 columns/);
  });
});
