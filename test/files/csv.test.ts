import { writeFileSync } from 'node:fs';
import { join } from 'node:path';
import fc from 'fast-check';
import { describe, expect, test } from 'vitest';
import { csvNumbers, csvTexts, parseCsv } from '../../src/files/csv-parse.ts';
import type { CsvColumn } from '../../src/files/csv-write.ts';
import { writeCsv } from '../../src/files/csv-write.ts';
import { InputError } from '../../src/units/input-error.ts';
import { inFolder, needPython, pythonJson } from '../support/tools.ts';

const COLUMNS: readonly CsvColumn[] = [
  { name: 'azimuth', unit: 'deg', type: 'float64', values: [0, 22.5, 45], description: 'Centre of the sector: "φ".' },
  { name: 'RM', unit: 'rad/m^2', type: 'float64', values: [-12.345678901234567, NaN, 1e-300] },
  { name: 'pixels', type: 'int64', values: [1, -2, 9007199254740991] },
  { name: 'name', type: 'string', values: ['plain', 'with, "quotes"', '#µ'] },
  { name: 'brightness', unit: 'Jy/beam', type: 'float64', values: [0.1, 0.2, 0.30000000000000004] },
];
const META = { version: '0.1.0', seed: 7, 'the scene': "it's: [here]" };

test('astropy reads types, units and values of what is written, and we read what it writes', (context) => {
  needPython(context, 'astropy', 'numpy');
  const code = `
import sys, json
import numpy as np
from astropy.table import Table
folder = sys.argv[1]
t = Table.read(f'{folder}/ours.csv', format='ascii.ecsv')
t.write(f'{folder}/theirs.csv', format='ascii.ecsv', delimiter=',')
clean = lambda a: [None if isinstance(x, float) and np.isnan(x) else x for x in a.tolist()]
print(json.dumps(dict(names=t.colnames, units=[None if t[c].unit is None else t[c].unit.to_string() for c in t.colnames], description=t['azimuth'].description,
    types=[t[c].dtype.kind for c in t.colnames], values=[clean(t[c]) for c in t.colnames], meta=dict(t.meta), theirs=open(f'{folder}/theirs.csv').read())))
`;
  const read = inFolder((folder) => {
    writeFileSync(join(folder, 'ours.csv'), writeCsv(COLUMNS, META));
    return pythonJson(code, [folder]) as { readonly theirs: string };
  });
  expect(read).toMatchObject({
    names: ['azimuth', 'RM', 'pixels', 'name', 'brightness'],
    units: ['deg', 'rad / m2', null, null, 'Jy / beam'],
    description: 'Centre of the sector: "φ".',
    types: ['f', 'f', 'i', 'U', 'f'],
    values: [[0, 22.5, 45], [-12.345678901234567, null, 1e-300], [1, -2, 9007199254740991], ['plain', 'with, "quotes"', '#µ'], [0.1, 0.2, 0.30000000000000004]],
    meta: META,
  });
  const theirs = parseCsv(read.theirs, 'theirs.csv');
  expect(theirs.units).toEqual({ azimuth: 'deg', RM: 'rad / m2', brightness: 'Jy / beam' });
  expect(csvNumbers(theirs, 'RM')).toEqual(Float64Array.of(-12.345678901234567, NaN, 1e-300));
  expect(csvTexts(theirs, 'name')).toEqual(['plain', 'with, "quotes"', '#µ']);
});

test('write, read: any numbers and texts', () => {
  const rows = fc.array(fc.tuple(fc.double({ noDefaultInfinity: true }), fc.string({ unit: fc.constantFrom('"', ',', '\n', '\r', '#', ' ', 'a', 'µ') })), { maxLength: 8 });
  fc.assert(
    fc.property(rows, (list) => {
      const columns: CsvColumn[] = [
        { name: 'text, "quoted"', type: 'string', values: list.map(([, text]) => text) },
        { name: 'number', unit: 'uG', type: 'float64', values: list.map(([number]) => number) },
      ];
      const table = parseCsv(writeCsv(columns), 't');
      expect(table.units).toEqual({ number: 'uG' });
      expect(csvNumbers(table, 'number')).toEqual(Float64Array.from(list, ([number]) => number));
      expect(csvTexts(table, 'text, "quoted"')).toEqual(list.map(([, text]) => text));
    }),
    { seed: 6, numRuns: 300 },
  );
});

describe('reading', () => {
  test('comments, empty lines, line ends, a byte order mark, quotes over lines', () => {
    const table = parseCsv('\uFEFF# sectors\r\na,b\r\n\r\n1,"x\ny, ""z"""\r\n# more\r\n-2.5e3,', 't');
    expect(csvNumbers(table, 'a')).toEqual(Float64Array.of(1, -2500));
    expect(csvTexts(table, 'b')).toEqual(['x\ny, "z"', '']);
    expect(table.rows[1][0]).toEqual({ text: '-2.5e3', line: 7, column: 1 });
    expect(parseCsv('a\n', 't').rows).toEqual([]);
  });

  test.each([
    ['', 't.csv: the table is empty'],
    ['# only\n', 't.csv: the table is empty'],
    ['a,b\n1,2\n3\n', 't.csv:3: the row has 1 cell, the header 2: a, b'],
    ['a,a\n', 't.csv:1:3: column name "a" is given twice'],
    ['a,,c\n', 't.csv:1:3: column 2 has no name'],
    ['a,b\n1,"2\n', 't.csv:2:3: a quote is opened and never closed'],
    ['a,b\n1,"2"3\n', 't.csv:2:6: text follows a closing quote'],
    ['a,b\n"x\ny"z,1\n', 't.csv:3:3: text follows a closing quote'],
    ['a,b\n1,2"\n', 't.csv:2:4: a quote stands within an unquoted cell'],
    ['# %ECSV 1.0\n# ---\n# datatype:\n# - {name: a, datatype: float64}\na b\n1 2\n', 't.csv: the ECSV table has delimiter " "; allowed: ","'],
    ['# %ECSV 1.0\n# ---\n# {a: [\na,b\n', 't.csv: the ECSV header is no YAML'],
  ])('what is wrong has its place: %j', (text, message) => {
    expect(() => parseCsv(text, 't.csv')).toThrow(InputError);
    expect(() => parseCsv(text, 't.csv')).toThrow(message);
  });

  test('cells that are no numbers, columns that are not there', () => {
    const table = parseCsv('ra,rm\n"1\n",5 rad\n2,\n', 't.csv');
    expect(() => csvNumbers(table, 'rm')).toThrow('t.csv:3:3: column "rm": "5 rad" is no number');
    expect(() => csvNumbers(parseCsv('a,b\n1,\n', 't.csv'), 'b')).toThrow('t.csv:2:3: column "b": the cell is empty');
    expect(() => csvNumbers(parseCsv('a\n1e999\n', 't.csv'), 'a')).toThrow('"1e999" is no number');
    expect(() => csvNumbers(table, 'rn')).toThrow('t.csv: no column "rn" (did you mean "ra"?); there are: ra, rm');
  });
});

test('what cannot be written', () => {
  const values = [1, 2];
  expect(() => writeCsv([{ name: 'a', type: 'float64', values }, { name: 'b', type: 'float64', values: [1] }])).toThrow('column b has 1 rows');
  expect(() => writeCsv([{ name: 'a', type: 'int64', values: [1.5] }])).toThrow('column a holds 1.5');
  expect(() => writeCsv([{ name: 'a', type: 'int64', values }, { name: 'a', type: 'int64', values }])).toThrow('a column name is given twice');
});
