import { readFileSync } from 'node:fs';
import { join } from 'node:path';
import { parquetMetadata, parquetReadObjects } from 'hyparquet';
import { describe, expect, it } from 'vitest';
import { csvNumbers, csvTexts, parseCsv } from '../../src/files/csv-parse.ts';
import { csvHead, csvRow, writeCsv, type TableColumn } from '../../src/files/csv-write.ts';
import { FileWriter } from '../../src/files/file-writer.ts';
import { ParquetTable, writeParquet } from '../../src/files/parquet-write.ts';
import { namesIn } from '../cli/run.ts';
import { inFolder } from '../support/tools.ts';

const columns: readonly TableColumn[] = [
  { name: 'point', type: 'int64' },
  { name: 'scene', type: 'string', description: 'which, "quoted"' },
  { name: 'depth', type: 'float64', unit: 'rad/m2' },
];
const rows = (count: number): (readonly [number, string, number])[] => Array.from({ length: count }, (_, k) => [k, k % 3 === 0 ? 'a, b' : 'c', k % 5 === 0 ? NaN : Math.sin(k)] as const);

describe('tables written row by row', () => {
  it('as CSV are those written whole', () => {
    const all = rows(50);
    const text = csvHead(columns, { title: 'x' }) + all.map((row) => csvRow(columns, row)).join('');
    const whole = writeCsv([
      { ...columns[0], type: 'int64', values: all.map(([k]) => k) }, { ...columns[1], type: 'string', values: all.map(([, name]) => name) }, { ...columns[2], type: 'float64', values: all.map(([, , x]) => x) },
    ], { title: 'x' });
    expect(text).toBe(whole);
    const table = parseCsv(text, 't.csv');
    expect(csvTexts(table, 'scene')[0]).toBe('a, b');
    expect(csvNumbers(table, 'depth')[1]).toBe(Math.sin(1));
  });

  it('as Parquet are read back in row groups, units in the metadata', async () => {
    const count = 45_000;
    await inFolder(async (folder) => {
      const path = join(folder, 't.parquet');
      const file = new FileWriter(path);
      const table = new ParquetTable(columns, { title: 'x' }, file);
      for (const row of rows(count)) table.add(row);
      table.finish();
      file.finish();
      expect(namesIn(folder)).toEqual(['t.parquet']);
      // From here on nothing is read from the folder.
      const bytes = readFileSync(path);
      const buffer = bytes.buffer.slice(bytes.byteOffset, bytes.byteOffset + bytes.length) as ArrayBuffer;
      const meta = parquetMetadata(buffer);
      expect(meta.row_groups.map((group) => Number(group.num_rows))).toEqual([20_000, 20_000, 5000]);
      expect(meta.key_value_metadata?.find(({ key }) => key === 'units')?.value).toBe('{"depth":"rad/m2"}');
      const read = await parquetReadObjects({ file: buffer });
      expect(read.length).toBe(count);
      rows(count).forEach(([point, scene, depth], k) => {
        if (read[k].point !== BigInt(point) || read[k].scene !== scene || !Object.is(read[k].depth, depth)) throw new Error(`row ${k} differs`);
      });
    });
  });

  it('as whole Parquet tables are read back, also without rows', async () => {
    for (const count of [0, 1, 20_001]) {
      const values = Float64Array.from({ length: count }, (_, k) => Math.sin(k));
      const bytes = writeParquet([{ name: 'field.halo.strength', unit: 'uG', type: 'float64', values }], { method: 'nested' });
      const buffer = bytes.buffer as ArrayBuffer;
      expect(parquetMetadata(buffer).key_value_metadata).toContainEqual({ key: 'method', value: 'nested' });
      const read = await parquetReadObjects({ file: buffer });
      expect(read.map((row) => row['field.halo.strength'] as number)).toEqual([...values]);
    }
  });

  it('leave nothing where they are abandoned, and are not there before they are finished', () => {
    inFolder((folder) => {
      const file = new FileWriter(join(folder, 'x', 't.csv'));
      file.add('a'.repeat(1 << 19));
      expect(namesIn(join(folder, 'x')).includes('t.csv')).toBe(false);
      file.abandon();
      expect(namesIn(join(folder, 'x'))).toEqual([]);
    });
  });
});
