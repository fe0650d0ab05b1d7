/** What a column is called and what it holds. */
export interface CsvColumnBase {
  readonly name: string;
  /** Such as `rad/m2`, `Jy/beam`; left out for a pure number. */
  readonly unit?: string;
  /** One sentence for the header. */
  readonly description?: string;
}

/** A column to write. `int64` takes whole numbers; NaN of a `float64` is written `nan`. */
export type CsvColumn = CsvColumnBase &
  (
    | { readonly type: 'float64' | 'int64'; readonly values: ArrayLike<number> }
    | { readonly type: 'string'; readonly values: readonly string[] }
  );

/**
 * Comma-separated values (RFC 4180, lines ended by a bare newline) with units and types in an ECSV
 * header, YAML in comment lines. `meta` says in a line each where the table comes from. Throws
 * RangeError where columns differ in length, an `int64` is no whole number, or a name is repeated.
 */
export function writeCsv(columns: readonly CsvColumn[], meta: Readonly<Record<string, string | number>> = {}): string {
  const count = columns[0]?.values.length ?? 0;
  for (const { name, values } of columns) {
    if (values.length !== count) throw new RangeError(`column ${name} has ${values.length} rows, the first ${count}`);
  }
  if (new Set(columns.map(({ name }) => name)).size < columns.length) throw new RangeError('a column name is given twice');
  const lines = [...ecsvHeader(columns, meta), columns.map(({ name }) => quoted(name)).join(',')];
  for (let row = 0; row < count; row++) lines.push(columns.map((column) => cellText(column, row)).join(','));
  return `${lines.join('\n')}\n`;
}

/** A column without its values, for tables that are written row by row. */
export interface TableColumn extends CsvColumnBase {
  readonly type: 'float64' | 'int64' | 'string';
}

/** The head of a table that is written row by row: ECSV header and names, each line ended. */
export function csvHead(columns: readonly TableColumn[], meta: Readonly<Record<string, string | number>>): string {
  return `${[...ecsvHeader(columns, meta), columns.map(({ name }) => quoted(name)).join(',')].join('\n')}\n`;
}

/** One row of such a table, its line ended; cells in the order of the columns. */
export function csvRow(columns: readonly TableColumn[], cells: readonly (number | string)[]): string {
  return `${columns.map((column, k) => (typeof cells[k] === 'string' ? quoted(cells[k]) : numberText(column, cells[k]))).join(',')}\n`;
}

/** YAML in flow style: every text as JSON, which is YAML. */
function ecsvHeader(columns: readonly TableColumn[], meta: Readonly<Record<string, string | number>>): string[] {
  const items = columns.map(({ name, unit, type, description }) => {
    const fields = { name, unit, datatype: type, description };
    const parts = Object.entries(fields).flatMap(([key, value]) => (value ? [`${key}: ${JSON.stringify(value)}`] : []));
    return `# - {${parts.join(', ')}}`;
  });
  const metaItems = Object.entries(meta).map(([key, value]) => `# - {${JSON.stringify(key)}: ${JSON.stringify(value)}}`);
  return [
    '# %ECSV 1.0',
    '# ---',
    "# delimiter: ','",
    '# datatype:',
    ...items,
    ...(metaItems.length > 0 ? ['# meta: !!omap', ...metaItems] : []),
  ];
}

function cellText(column: CsvColumn, row: number): string {
  return column.type === 'string' ? quoted(column.values[row]) : numberText(column, column.values[row]);
}

function numberText(column: TableColumn, value: number): string {
  if (column.type === 'int64' && !Number.isSafeInteger(value)) throw new RangeError(`column ${column.name} holds ${value}, no whole number`);
  if (Number.isFinite(value)) return Object.is(value, -0) ? '-0.0' : String(value);
  return Number.isNaN(value) ? 'nan' : value > 0 ? 'inf' : '-inf';
}

/** Quoted where RFC 4180 needs it, and where a reader could take the text for a comment or nothing. */
function quoted(text: string): string {
  return /^$|[",\r\n]|^#|^\s|\s$/.test(text) ? `"${text.replaceAll('"', '""')}"` : text;
}
