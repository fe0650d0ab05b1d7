import { BLANK_TEXT, fixedText } from './number-text.ts';

/** A column of a text table; `decimal` stands numbers under each other by their decimal point. */
export interface TextColumn {
  readonly title: string;
  readonly align: 'left' | 'right' | 'decimal';
}

/**
 * A table as lines of plain text, columns two or more spaces apart, no line with spaces at its end.
 * Throws RangeError where a row has not one cell a column.
 */
export function textTable(columns: readonly TextColumn[], rows: readonly (readonly string[])[], indent = 2): string {
  for (const row of rows) {
    if (row.length !== columns.length) throw new RangeError(`a row has ${row.length} cells for ${columns.length} columns`);
  }
  const blocks = columns.map((column, k) => {
    const cells = rows.map((row) => oneLine(row[k]));
    const aligned = column.align === 'decimal' ? onPoint(cells) : cells;
    const width = Math.max(...[oneLine(column.title), ...aligned].map(cellWidth));
    const pad = (text: string): string => {
      const spaces = ' '.repeat(width - cellWidth(text));
      return column.align === 'left' ? text + spaces : spaces + text;
    };
    return [oneLine(column.title), ...aligned].map(pad);
  });
  const lines = Array.from({ length: rows.length + 1 }, (_, n) =>
    (' '.repeat(indent) + blocks.map((block) => block[n]).join('   ')).trimEnd(),
  );
  return lines.join('\n');
}

/** One hypothesis of a ranking. */
export interface RankingRow {
  readonly name: string;
  readonly chi2PerN: number;
  /** AIC above the best; 0 for the best itself. */
  readonly deltaAic: number;
  /** ln evidence less the best's, with one standard deviation of the difference; from nested sampling only. */
  readonly deltaLnEvidence?: number;
  readonly deltaLnEvidenceError?: number;
  /** Correlation of neighbouring whitened residuals, with one standard deviation: 0 where noise alone is left. */
  readonly neighbours?: number;
  readonly neighboursError?: number;
  /** Where the data tell it from the best, in words; empty for the best. */
  readonly decidedBy?: string;
}

/** Hypotheses from best to worst by evidence where all have it, else by AIC; those without a number last, in the order given. */
export function ranked<Row extends Pick<RankingRow, 'deltaAic' | 'deltaLnEvidence'>>(rows: readonly Row[]): readonly Row[] {
  const evidence = rows.every((row) => row.deltaLnEvidence !== undefined);
  const number = (row: Row): number => (evidence ? -row.deltaLnEvidence! : row.deltaAic);
  const key = (row: Row): number => (Number.isNaN(number(row)) ? Infinity : number(row));
  return [...rows].sort((a, b) => (key(a) === key(b) ? 0 : key(a) - key(b)));
}

/** chi-squared per datum: two decimals, fewer from 10 up. */
export function chi2Text(chi2PerN: number): string {
  return fixedText(chi2PerN, chi2PerN >= 99.95 ? 0 : chi2PerN >= 9.995 ? 1 : 2);
}

/** AIC above the best with its sign: one decimal, none from 1000 up. */
export function deltaAicText(deltaAic: number): string {
  if (!Number.isFinite(deltaAic)) return BLANK_TEXT;
  const text = fixedText(deltaAic, Math.abs(deltaAic) >= 999.95 ? 0 : 1);
  return /^0[.0]*$/.test(text) || text.startsWith('−') ? text : `+${text}`;
}

/** ln evidence less the best's, with its error. */
export function deltaLnEvidenceText({ deltaLnEvidence, deltaLnEvidenceError }: Pick<RankingRow, 'deltaLnEvidence' | 'deltaLnEvidenceError'>): string {
  if (deltaLnEvidence === undefined) return BLANK_TEXT;
  if (deltaLnEvidence === 0) return '0';
  return deltaLnEvidenceError === undefined ? fixedText(deltaLnEvidence, 1) : `${fixedText(deltaLnEvidence, 1)} ± ${fixedText(deltaLnEvidenceError, 1)}`;
}

/** Correlation of neighbouring residuals, with its error. */
export function neighboursText({ neighbours, neighboursError }: Pick<RankingRow, 'neighbours' | 'neighboursError'>): string {
  if (neighbours === undefined || neighboursError === undefined || !Number.isFinite(neighbours)) return BLANK_TEXT;
  return `${fixedText(neighbours, 2)} ± ${fixedText(neighboursError, 2)}`;
}

/** The ranking as plain text: place, name, chi-squared per datum, whiteness where known, AIC above the best, Δ ln Z where known, what decided. */
export function rankingTable(rows: readonly RankingRow[]): string {
  const evidence = rows.some((row) => row.deltaLnEvidence !== undefined);
  const white = rows.some((row) => row.neighbours !== undefined);
  const lines = ranked(rows).map((row, k) => [
    `${k + 1} ${row.name}`, chi2Text(row.chi2PerN), ...(white ? [neighboursText(row)] : []), deltaAicText(row.deltaAic), ...(evidence ? [deltaLnEvidenceText(row)] : []), row.decidedBy ?? '',
  ]);
  return textTable(
    [
      { title: '  hypothesis', align: 'left' },
      { title: 'χ²/N', align: 'decimal' },
      ...(white ? [{ title: 'neighbours', align: 'right' as const }] : []),
      { title: 'Δ AIC', align: 'decimal' },
      ...(evidence ? [{ title: 'Δ ln Z', align: 'right' as const }] : []),
      { title: 'decided by', align: 'left' },
    ],
    lines,
  );
}

/** Cells moved left until their decimal points, or ends of whole numbers, stand under each other. */
function onPoint(cells: readonly string[]): readonly string[] {
  const tails = cells.map((cell) => {
    const point = cell.search(/[.]\d*$/);
    return point < 0 ? 0 : cell.length - point;
  });
  const longest = Math.max(0, ...tails);
  return cells.map((cell, k) => (cell === BLANK_TEXT || cell === '' ? cell : cell + ' '.repeat(longest - tails[k])));
}

/** A name from a file may hold control characters, and a terminal obeys them. */
function oneLine(text: string): string {
  return text.replace(/[\u0000-\u001f\u007f-\u009f]+/g, ' ');
}

/** East Asian wide characters and pictures. */
const WIDE = /[\u1100-\u115f\u2e80-\u303e\u3041-\ua4cf\uac00-\ud7a3\uf900-\ufaff\ufe30-\ufe6f\uff00-\uff60\uffe0-\uffe6\u{1f300}-\u{1faff}]/u;

/** Columns that text takes in a terminal: wide characters two, combining marks none. */
function cellWidth(text: string): number {
  let width = 0;
  for (const character of text) width += /\p{Mark}/u.test(character) ? 0 : WIDE.test(character) ? 2 : 1;
  return width;
}
