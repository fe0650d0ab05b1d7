import { parse as parseYaml } from 'yaml';
import { InputError, nearestHint } from '../units/input-error.ts';

interface CsvCell {
  readonly text: string;
  /** Where it begins in the file, from 1. */
  readonly line: number;
  readonly column: number;
}

/** A table of comma-separated values: a header row of names, then rows of as many cells. */
export interface CsvTable {
  readonly file: string;
  readonly names: readonly string[];
  /** Units by column name, from an ECSV header; empty where there is none. */
  readonly units: Readonly<Record<string, string>>;
  readonly rows: readonly (readonly CsvCell[])[];
}

/**
 * Parse comma-separated values (RFC 4180) with a header row. Lines before a row that begin with `#`
 * are comments; those of an ECSV header give units. Empty lines are skipped. Throws InputError with
 * file, line and column for open quotes, rows of another length, missing or repeated names.
 */
export function parseCsv(text: string, file: string): CsvTable {
  const { records, comments } = splitRecords(text.replace(/^\uFEFF/, ''), file);
  const units = ecsvUnits(comments, file);
  if (records.length === 0) throw new InputError('the table is empty; a header row of column names is needed', { file });
  const [header, ...rows] = records;
  const names = header.map((cell) => cell.text.trim());
  header.forEach((cell, i) => {
    const place = { file, line: cell.line, column: cell.column };
    if (names[i] === '') throw new InputError(`column ${i + 1} has no name`, place);
    if (names.indexOf(names[i]) < i) throw new InputError(`column name "${names[i]}" is given twice`, place);
  });
  for (const row of rows) {
    if (row.length === names.length) continue;
    const count = `${row.length} cell${row.length === 1 ? '' : 's'}`;
    throw new InputError(`the row has ${count}, the header ${names.length}: ${names.join(', ')}`, { file, line: row[0].line });
  }
  return { file, names, units, rows };
}

/** A column of numbers; `nan` is NaN. Throws InputError where it is missing or a cell is no number. */
export function csvNumbers(table: CsvTable, name: string): Float64Array {
  const index = columnIndex(table, name);
  return Float64Array.from(table.rows, (row) => {
    const { text, line, column } = row[index];
    const word = text.trim();
    if (/^nan$/i.test(word)) return NaN;
    if (/^[+-]?(\d+\.?\d*|\.\d+)([eE][+-]?\d+)?$/.test(word) && Number.isFinite(Number(word))) return Number(word);
    throw new InputError(`column "${name}": ${word === '' ? 'the cell is empty' : `"${word}" is no number`}`, {
      file: table.file,
      line,
      column,
    });
  });
}

/** A column as it stands. Throws InputError where it is missing. */
export function csvTexts(table: CsvTable, name: string): string[] {
  const index = columnIndex(table, name);
  return table.rows.map((row) => row[index].text);
}

function columnIndex(table: CsvTable, name: string): number {
  const index = table.names.indexOf(name);
  if (index >= 0) return index;
  throw new InputError(`no column "${name}"${nearestHint(name, table.names)}; there are: ${table.names.join(', ')}`, {
    file: table.file,
  });
}

function splitRecords(text: string, file: string): { records: CsvCell[][]; comments: string[] } {
  const records: CsvCell[][] = [];
  const comments: string[] = [];
  const lineEnd = /\r\n|\n|\r|$/g;
  let line = 1;
  let at = 0;
  while (at < text.length) {
    lineEnd.lastIndex = at;
    const end = lineEnd.exec(text)?.index ?? text.length;
    const whole = text.slice(at, end);
    if (whole.startsWith('#') || whole.trim() === '') {
      if (whole.startsWith('#')) comments.push(whole);
      at = afterLineEnd(text, end);
      line++;
      continue;
    }
    const record = readRecord(text, at, line, file);
    records.push(record.cells);
    at = record.end;
    line = record.line;
  }
  return { records, comments };
}

/** One record, which quoted cells may carry over several lines. */
function readRecord(text: string, start: number, firstLine: number, file: string): { cells: CsvCell[]; end: number; line: number } {
  const cells: CsvCell[] = [];
  let line = firstLine;
  let lineStart = start;
  let at = start;
  for (;;) {
    const place = { line, column: at - lineStart + 1 };
    let cell: string;
    if (text[at] === '"') {
      const match = /"((?:[^"]|"")*)"/y;
      match.lastIndex = at;
      const quoted = match.exec(text);
      if (quoted === null) throw new InputError('a quote is opened and never closed', { file, ...place });
      for (const lineBreak of quoted[0].matchAll(/\r\n|\n|\r/g)) {
        line++;
        lineStart = at + lineBreak.index + lineBreak[0].length;
      }
      at += quoted[0].length;
      cell = quoted[1].replaceAll('""', '"');
      if (at < text.length && !/[,\r\n]/.test(text[at])) {
        throw new InputError('text follows a closing quote; a comma or the end of the line is needed', { file, line, column: at - lineStart + 1 });
      }
    } else {
      const match = /[^,\r\n]*/y;
      match.lastIndex = at;
      cell = match.exec(text)?.[0] ?? '';
      if (cell.includes('"')) throw new InputError('a quote stands within an unquoted cell', { file, line, column: at - lineStart + 1 + cell.indexOf('"') });
      at += cell.length;
    }
    cells.push({ text: cell, ...place });
    if (text[at] !== ',') return { cells, end: afterLineEnd(text, at), line: line + 1 };
    at++;
  }
}

function afterLineEnd(text: string, at: number): number {
  return text.startsWith('\r\n', at) ? at + 2 : at + 1;
}

/** Units of the columns that an ECSV header (a YAML text in comments) declares. */
function ecsvUnits(comments: readonly string[], file: string): Record<string, string> {
  if (!/^# %ECSV /.test(comments[0] ?? '')) return {};
  const yaml = comments.slice(1).map((comment) => comment.replace(/^# ?/, ''));
  let header: unknown;
  try {
    // Tags for what only other readers know are not errors here.
    header = parseYaml(yaml.join('\n'), { logLevel: 'error' });
  } catch (error) {
    throw new InputError(`the ECSV header is no YAML: ${error instanceof Error ? error.message : String(error)}`, { file });
  }
  const { delimiter, datatype } = isRecord(header) ? header : {};
  if (delimiter !== ',') throw new InputError(`the ECSV table has delimiter ${JSON.stringify(delimiter ?? ' ')}; allowed: ","`, { file });
  const units: Record<string, string> = {};
  for (const column of Array.isArray(datatype) ? datatype : []) {
    if (isRecord(column) && typeof column.name === 'string' && typeof column.unit === 'string') units[column.name] = column.unit;
  }
  return units;
}

function isRecord(value: unknown): value is Record<string, unknown> {
  return typeof value === 'object' && value !== null;
}
