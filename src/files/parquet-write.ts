import { ByteWriter, ParquetWriter, schemaFromColumnData } from 'hyparquet-writer';
import type { CsvColumn, TableColumn } from './csv-write.ts';

/** Rows of a row group: what is held in memory at once. */
const groupRows = 20_000;

const types = { float64: 'DOUBLE', int64: 'INT64', string: 'STRING' } as const;

/** Where the bytes of a file go as they are made. */
export interface ByteSink {
  add(bytes: Uint8Array): void;
}

type Cells = Float64Array | BigInt64Array | string[];

/**
 * Writes a Parquet file row by row, in groups of 20000 rows, so that memory does not grow with the
 * table. Units and descriptions stand under the keys `units` and `descriptions` of its metadata, as
 * JSON by column name, beside those of `meta`.
 */
export class ParquetTable {
  private readonly bytes = new ByteWriter();
  private readonly writer: ParquetWriter;
  private group: readonly Cells[];
  private count = 0;

  constructor(private readonly columns: readonly TableColumn[], meta: Readonly<Record<string, string | number>>, private readonly sink: ByteSink) {
    const about = (pick: (column: TableColumn) => string | undefined): string => JSON.stringify(Object.fromEntries(columns.flatMap((column) => (pick(column) ? [[column.name, pick(column)]] : []))));
    this.group = this.emptyGroup();
    this.writer = new ParquetWriter({
      writer: this.bytes,
      schema: schemaFromColumnData({ columnData: this.columnData(0) }),
      kvMetadata: [
        ...Object.entries(meta).map(([key, value]) => ({ key, value: String(value) })),
        { key: 'units', value: about(({ unit }) => unit) },
        { key: 'descriptions', value: about(({ description }) => description) },
      ],
      createdBy: 'gyrelight',
    });
  }

  /** Cells in the order of the columns. */
  add(cells: readonly (number | string)[]): void {
    this.group.forEach((column, k) => {
      const cell = cells[k];
      if (column instanceof BigInt64Array) column[this.count] = BigInt(cell);
      else if (column instanceof Float64Array) column[this.count] = Number(cell);
      else column[this.count] = String(cell);
    });
    this.count++;
    if (this.count === groupRows) this.writeGroup();
  }

  finish(): void {
    if (this.count > 0) this.writeGroup();
    void this.writer.finish();
    this.drain();
  }

  private writeGroup(): void {
    void this.writer.write({ columnData: this.columnData(this.count), rowGroupSize: this.count });
    this.group = this.emptyGroup();
    this.count = 0;
    this.drain();
  }

  private drain(): void {
    this.sink.add(new Uint8Array(this.bytes.buffer, 0, this.bytes.index).slice());
    this.bytes.index = 0;
  }

  private columnData(count: number): { name: string; data: Cells; type: (typeof types)[TableColumn['type']]; nullable: false }[] {
    return this.columns.map(({ name, type }, k) => ({ name, data: this.group[k].slice(0, count), type: types[type], nullable: false }));
  }

  private emptyGroup(): readonly Cells[] {
    return this.columns.map(({ type }) => (type === 'float64' ? new Float64Array(groupRows) : type === 'int64' ? new BigInt64Array(groupRows) : []));
  }
}

/** A whole table as a Parquet file, its columns as `writeCsv` takes them. */
export function writeParquet(columns: readonly CsvColumn[], meta: Readonly<Record<string, string | number>> = {}): Uint8Array {
  const parts: Uint8Array[] = [];
  const table = new ParquetTable(columns, meta, { add: (bytes) => parts.push(bytes) });
  const rows = columns[0]?.values.length ?? 0;
  for (let row = 0; row < rows; row++) table.add(columns.map(({ values }) => values[row]));
  table.finish();
  const whole = new Uint8Array(parts.reduce((sum, part) => sum + part.length, 0));
  let at = 0;
  for (const part of parts) {
    whole.set(part, at);
    at += part.length;
  }
  return whole;
}
