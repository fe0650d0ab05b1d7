import { join } from 'node:path';
import { csvHead, csvRow } from '../files/csv-write.ts';
import { FileWriter } from '../files/file-writer.ts';
import { ParquetTable } from '../files/parquet-write.ts';
import type { RowStore } from '../files/row-store.ts';
import { makeDesign, rowCount } from '../sweep/design.ts';
import { SweepReading } from '../sweep/reading.ts';
import { tableCells, tableColumns } from '../sweep/table.ts';
import type { SweepPlan } from '../sweep/types.ts';

/**
 * Merges the rows of a full store, in their order and one at a time, into `sweep.csv` and
 * `sweep.parquet`, and sums them up on the way. Both files are there whole or not at all.
 */
export function mergeRows(plan: SweepPlan, store: RowStore, out: string, meta: Readonly<Record<string, string | number>>, onProgress: (done: number, total: number) => void): SweepReading {
  const columns = tableColumns(plan);
  const design = makeDesign(plan);
  const reading = new SweepReading(plan);
  const realisations = Math.max(1, plan.realisations);
  const total = rowCount(plan);
  const csv = new FileWriter(join(out, 'sweep.csv'));
  let parquet: FileWriter | undefined;
  try {
    parquet = new FileWriter(join(out, 'sweep.parquet'));
    const table = new ParquetTable(columns, meta, parquet);
    csv.add(csvHead(columns, meta));
    for (let row = 0; row < total; row++) {
      const at = design(Math.floor(row / realisations));
      const measured = store.values(row);
      const cells = tableCells(plan, row, at, measured);
      csv.add(csvRow(columns, cells));
      table.add(cells);
      reading.add(row, at, measured);
      if (row % 1000 === 0) onProgress(row, total);
    }
    table.finish();
    parquet.finish();
    csv.finish();
  } catch (error) {
    csv.abandon();
    parquet?.abandon();
    throw error;
  }
  onProgress(total, total);
  return reading;
}
