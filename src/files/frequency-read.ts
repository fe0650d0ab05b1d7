import type { Axis } from './fits-axes.ts';
import { findNumber, findString } from './fits-header.ts';
import { tableNumbers, getColumn } from './fits-table.ts';
import type { Card, FitsHdu, FitsPlace, TableHdu } from './fits-types.ts';
import { fitsError, fitsPlace } from './fits-types.ts';
import { CHANNEL_TABLE } from './sky-header.ts';

const HERTZ: Readonly<Record<string, number>> = { '': 1, Hz: 1, kHz: 1e3, MHz: 1e6, GHz: 1e9 };

/** Frequencies along an axis and, where the file states them, widths and noise of its channels. */
export interface FrequencyList {
  readonly frequenciesHz: readonly number[];
  /** Spacing of a linear axis, undefined for a table. */
  readonly spacingHz?: number;
  readonly widthsHz?: readonly number[];
  readonly noise?: readonly number[];
}

/**
 * The frequencies of a FREQ or FREQ-TAB axis (Greisen et al. 2006). Throws InputError naming the
 * keyword where the axis is of another kind, has no step, or its table is missing.
 */
export function readFrequencies(
  axis: Axis,
  step: number,
  cards: readonly Card[],
  hdus: readonly FitsHdu[],
  place: FitsPlace,
): FrequencyList {
  const { number, ctype } = axis;
  const given = Array.from({ length: axis.length }, (_, k) => axis.crval + step * (k + 1 - axis.crpix));
  if (axis.length > 1 && step === 0) throw fitsError(place, `axis ${number} (${ctype}) has step 0: CDELT${number} or CD${number}_${number}`);
  if (ctype === 'FREQ-TAB') return lookedUp(axis, given, cards, hdus, place);
  if (ctype !== 'FREQ') throw fitsError(place, `CTYPE${number} = '${ctype}'; allowed: FREQ, FREQ-TAB`);
  const hertz = hertzOf(axis.cunit, `CUNIT${number}`, place);
  const frequenciesHz = given.map((value) => value * hertz);
  if (!frequenciesHz.every((value) => value > 0)) {
    throw fitsError(place, `axis ${number} (FREQ) runs through ${frequenciesHz.find((value) => !(value > 0))} Hz; allowed: above 0`);
  }
  return { frequenciesHz, spacingHz: Math.abs(step * hertz) };
}

function hertzOf(unit: string, keyword: string, place: FitsPlace): number {
  const hertz = Object.entries(HERTZ).find(([name]) => name.toLowerCase() === unit.trim().toLowerCase());
  if (hertz) return hertz[1];
  throw fitsError(place, `${keyword} = '${unit}'; allowed: Hz, kHz, MHz, GHz`);
}

function lookedUp(axis: Axis, given: readonly number[], cards: readonly Card[], hdus: readonly FitsHdu[], place: FitsPlace): FrequencyList {
  // Find the table.
  const n = axis.number;
  const tableName = findString(cards, `PS${n}_0`, place) ?? '';
  const columnName = findString(cards, `PS${n}_1`, place) ?? '';
  const indexName = findString(cards, `PS${n}_2`, place)?.trim() ?? '';
  const version = findNumber(cards, `PV${n}_1`, place) ?? 1;
  const coordinateAxis = findNumber(cards, `PV${n}_3`, place) ?? 1;
  if (coordinateAxis !== 1) throw fitsError(place, `PV${n}_3 = ${coordinateAxis}; allowed: 1`);
  const index = hdus.findIndex(
    (hdu) => hdu.kind === 'table' && hdu.name === tableName && (findNumber(hdu.cards, 'EXTVER', place) ?? 1) === version,
  );
  const table = hdus[index];
  if (table?.kind !== 'table') throw fitsError(place, `PS${n}_0 = '${tableName}', version ${version}: the file has no such table`);

  // Look the frequencies up.
  const tablePlace = fitsPlace(place.file, index, table.name);
  const column = getColumn(table, columnName, tablePlace);
  if (table.rowCount !== 1 || column.dimensions.slice(0, -1).some((length) => length !== 1)) {
    throw fitsError(tablePlace, `column ${columnName} is no single list of frequencies: ${table.rowCount} rows, (${column.dimensions.join(',')})`);
  }
  const hertz = hertzOf(column.unit || axis.cunit, `unit of column ${columnName}`, tablePlace);
  const coordinates = tableNumbers(table, columnName, tablePlace);
  const indices = indexName === '' ? undefined : tableNumbers(table, indexName, tablePlace);
  if (indices && indices.length !== coordinates.length) throw fitsError(tablePlace, `columns ${columnName} and ${indexName} differ in length`);
  const frequenciesHz = given.map((psi) => hertz * interpolated(coordinates, indices ? indexOf(psi, indices) : psi));
  const bad = frequenciesHz.findIndex((value) => !(value > 0));
  if (bad >= 0) throw fitsError(tablePlace, `column ${columnName} gives channel ${bad + 1} the frequency ${frequenciesHz[bad]} Hz; allowed: above 0`);
  return { frequenciesHz, ...ownColumns(table, axis.length, tablePlace) };
}

/** Widths and noise, which a table of this program's own files has. */
function ownColumns(table: TableHdu, count: number, place: FitsPlace): Pick<FrequencyList, 'widthsHz' | 'noise'> {
  const has = (name: string): boolean => table.columns.some((column) => column.name === name && column.repeat === count);
  if (table.name !== CHANNEL_TABLE || !has('WIDTH') || !has('NOISE')) return {};
  return { widthsHz: Array.from(tableNumbers(table, 'WIDTH', place)), noise: Array.from(tableNumbers(table, 'NOISE', place)) };
}

/** Linear between the 1-based entries, half an entry beyond both ends (Greisen et al. 2006, section 6.1.2); else NaN. */
function interpolated(coordinates: Float64Array, upsilon: number): number {
  const last = coordinates.length;
  if (!(upsilon >= 0.5 && upsilon <= last + 0.5)) return NaN;
  if (last === 1) return coordinates[0];
  const k = Math.min(Math.max(Math.floor(upsilon), 1), last - 1);
  return coordinates[k - 1] + (upsilon - k) * (coordinates[k] - coordinates[k - 1]);
}

/** Where `psi` stands among the monotonic indices, 1-based and linear between them. */
function indexOf(psi: number, indices: Float64Array): number {
  const last = indices.length;
  if (last === 1) return psi === indices[0] ? 1 : NaN;
  const sign = Math.sign(indices[last - 1] - indices[0]);
  let k = 1;
  while (k < last - 1 && sign * (psi - indices[k]) > 0) k++;
  return k + (psi - indices[k - 1]) / (indices[k] - indices[k - 1]);
}
