import { readFits } from '../files/fits-read.ts';
import { readBytes } from '../files/node-io.ts';
import { skyImageFromFits } from '../files/sky-fits-read.ts';
import { sameGrid } from '../infer/map-facts.ts';
import type { Layout } from '../measure/layout.ts';
import { thermalShare, type ThermalShare } from '../measure/region-spectrum.ts';
import { InputError } from '../units/input-error.ts';
import { flagNumber, type MeasureFlags } from './measure-flags.ts';
import type { MapData } from './measure-input.ts';

/** The thermal share of I by pixel and frequency, from a number or a map; undefined where the user states none. */
export function thermalShares({ thermalFraction }: MeasureFlags, atHz: number | undefined, alpha: number, { frame }: MapData): ThermalShare | undefined {
  if (thermalFraction === undefined) {
    if (atHz !== undefined) throw new InputError('--thermal-at goes with --thermal-fraction only');
    return undefined;
  }
  const at = (share: number, frequencyHz: number): number => (atHz === undefined ? share : thermalShare(share, atHz, frequencyHz, alpha));
  const flag = `--thermal-fraction ${thermalFraction}`;
  if (/^[-+.\d]/.test(thermalFraction) && Number.isFinite(Number(thermalFraction))) {
    const share = flagNumber('thermal-fraction', thermalFraction, 0, 0.999);
    return (_, frequencyHz) => at(share, frequencyHz);
  }
  const image = skyImageFromFits(readFits(readBytes(thermalFraction), thermalFraction), thermalFraction);
  if (!sameGrid({ ...image, file: thermalFraction }, frame)) throw new InputError('the map is on another grid than the maps to measure', { flag });
  const wrong = image.values.find((value) => value < 0 || value >= 1);
  if (wrong !== undefined) throw new InputError(`the map has a share of ${wrong}; allowed: 0 to below 1`, { flag });
  return (pixel, frequencyHz) => at(image.values[pixel], frequencyHz);
}

/** Its mean over the pixels of a layout that have one; 0 where none is stated. */
export function meanThermalShare({ regionOf }: Layout, thermal: ThermalShare | undefined, frequencyHz: number): number {
  if (!thermal) return 0;
  let [sum, count] = [0, 0];
  regionOf.forEach((region, pixel) => {
    const share = region < 0 ? NaN : thermal(pixel, frequencyHz);
    if (!Number.isFinite(share)) return;
    sum += share;
    count++;
  });
  return count > 0 ? sum / count : 0;
}
