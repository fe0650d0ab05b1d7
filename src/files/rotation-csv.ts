import type { RotationCurve } from '../field/dynamo/rotation-curve.ts';
import { InputError } from '../units/input-error.ts';
import { convertQuantity } from '../units/quantity.ts';
import { csvNumbers, parseCsv } from './csv-parse.ts';

/**
 * A rotation curve from a table with the columns `radius` and `speed`: in kpc and km/s where an ECSV
 * header gives no other units. Throws InputError naming file, line and column.
 */
export function readRotationCsv(text: string, file: string): RotationCurve {
  const table = parseCsv(text, file);
  const column = (name: string, unit: string): number[] => {
    const given = table.units[name] ?? unit;
    try {
      const factor = convertQuantity(1, given, unit);
      return Array.from(csvNumbers(table, name), (value) => value * factor);
    } catch (error) {
      throw error instanceof InputError ? error.at({ file }) : error;
    }
  };
  return { radiiKpc: column('radius', 'kpc'), speedsKms: column('speed', 'km/s') };
}
