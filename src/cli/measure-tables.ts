import { writeCsv } from '../files/csv-write.ts';
import type { RegionPitch } from '../measure/pitch-angle.ts';
import type { Layout } from '../measure/layout.ts';
import type { RegionMean } from '../measure/region.ts';
import { depolarization } from '../sky/derived.ts';
import type { MapData } from './measure-input.ts';
import type { MeasuredBand, RegionLaws } from './measure-run.ts';

const degrees = 180 / Math.PI;

export interface ProfileOptions {
  /** Thermal share of I of a region at a frequency. */
  readonly thermal: (frequencyHz: number) => number;
  /** Of the synchrotron emission, for depolarization between bands. */
  readonly spectralIndex: number;
  readonly meta: Readonly<Record<string, string | number>>;
}

/** Every band and region: I, P, fraction, angle, RM, depolarization against the shortest wavelength, pitch. */
export function profilesCsv(data: MapData, layout: Layout, bands: readonly MeasuredBand[], rotation: readonly RegionMean[] | undefined, pitches: readonly RegionPitch[] | undefined, options: ProfileOptions): string {
  const rows = bands.flatMap((band) => layout.regions.map((region, k) => ({ band, region, k, values: band.regions[k] })));
  const column = (pick: (row: (typeof rows)[number]) => number): number[] => rows.map(pick);
  const shortest = bands[bands.length - 1];
  const isRings = layout.kind === 'rings';
  const fraction = ({ band, values }: (typeof rows)[number]): { value: number; error: number } => {
    const I = (values.I?.value ?? NaN) * (1 - options.thermal(band.centre.frequencyHz));
    if (!(I > 0)) return { value: NaN, error: NaN };
    const value = values.P.value / I;
    return { value, error: Math.hypot(values.P.error, value * (values.I?.error ?? 0)) / I };
  };
  const ratio = ({ band, k }: (typeof rows)[number]): { value: number; error: number } => {
    if (band === shortest) return { value: NaN, error: NaN };
    const [far, near] = [band.regions[k].P, shortest.regions[k].P];
    const [value] = depolarization([far.value], [near.value], band.centre.frequencyHz, shortest.centre.frequencyHz, options.spectralIndex);
    return { value, error: Math.abs(value) * Math.hypot(far.error / far.value, near.error / near.value) };
  };
  const place = isRings
    ? ([
        { name: 'inner', unit: 'kpc', type: 'float64', values: column(({ region }) => region.innerKpc), description: 'radius at which the ring begins' },
        { name: 'outer', unit: 'kpc', type: 'float64', values: column(({ region }) => region.outerKpc), description: 'radius at which it ends' },
        { name: 'azimuth', unit: 'deg', type: 'float64', values: column(({ region }) => region.azimuth * degrees), description: 'galaxy azimuth of the middle of the sector, 0 on the receding half of the major axis' },
      ] as const)
    : ([
        { name: 'from', unit: 'kpc', type: 'float64', values: column(({ region }) => region.innerKpc), description: 'along the major axis, positive on the receding half' },
        { name: 'to', unit: 'kpc', type: 'float64', values: column(({ region }) => region.outerKpc) },
        { name: 'across', unit: 'kpc', type: 'float64', values: column(({ region }) => region.alongKpc), description: 'offset from the major axis, positive at its position angle + 90 deg' },
      ] as const);
  return writeCsv(
    [
      { name: 'band', type: 'string', values: rows.map(({ band }) => band.band.name) },
      { name: 'frequency', unit: 'Hz', type: 'float64', values: column(({ band }) => band.centre.frequencyHz) },
      ...place,
      { name: 'pixels', type: 'int64', values: column(({ values }) => values.pixels) },
      { name: 'beams', type: 'float64', values: column(({ values }) => values.beams), description: 'independent beams' },
      { name: 'I', unit: data.unit, type: 'float64', values: column(({ values }) => values.I?.value ?? NaN) },
      { name: 'I_error', unit: data.unit, type: 'float64', values: column(({ values }) => values.I?.error ?? NaN) },
      { name: 'P', unit: data.unit, type: 'float64', values: column(({ values }) => values.P.value), description: 'mean of |Q + iU| without its bias' },
      { name: 'P_error', unit: data.unit, type: 'float64', values: column(({ values }) => values.P.error), description: 'from the noise' },
      { name: 'P_scatter', unit: data.unit, type: 'float64', values: column(({ values }) => values.P.scatter), description: 'standard deviation of the pixels' },
      { name: 'fraction', type: 'float64', values: column((row) => fraction(row).value), description: 'P over I without its thermal share' },
      { name: 'fraction_error', type: 'float64', values: column((row) => fraction(row).error) },
      { name: 'chi', unit: 'deg', type: 'float64', values: column(({ values }) => values.chi * degrees), description: 'angle of E, north through east' },
      { name: 'chi_error', unit: 'deg', type: 'float64', values: column(({ values }) => values.chiError * degrees) },
      { name: 'RM', unit: 'rad/m2', type: 'float64', values: column(({ k }) => rotation?.[k].value ?? NaN), description: 'of all bands together' },
      { name: 'RM_error', unit: 'rad/m2', type: 'float64', values: column(({ k }) => rotation?.[k].error ?? NaN) },
      { name: 'RM_scatter', unit: 'rad/m2', type: 'float64', values: column(({ k }) => rotation?.[k].scatter ?? NaN) },
      { name: 'RM_band', unit: 'rad/m2', type: 'float64', values: column(({ values }) => values.rm?.value ?? NaN), description: "of the band's own channels, where they reach far enough" },
      { name: 'RM_band_error', unit: 'rad/m2', type: 'float64', values: column(({ values }) => values.rm?.error ?? NaN) },
      { name: 'depolarization', type: 'float64', values: column((row) => ratio(row).value), description: `P over that of ${shortest.band.name}, without the synchrotron spectrum` },
      { name: 'depolarization_error', type: 'float64', values: column((row) => ratio(row).error) },
      { name: 'pitch', unit: 'deg', type: 'float64', values: column(({ k }) => (isRings ? (pitches?.[k].pitch ?? NaN) * degrees : NaN)), description: 'of the Faraday-corrected field in the disc; the same for all bands' },
      { name: 'pitch_error', unit: 'deg', type: 'float64', values: column(({ k }) => (isRings ? Math.max(pitches?.[k].error ?? NaN, pitches?.[k].scatterError ?? NaN) * degrees : NaN)) },
    ],
    options.meta,
  );
}

/** Every law fitted to every region, one row a parameter, the best law of a region first. */
export function lawsCsv(layout: Layout, regions: readonly RegionLaws[], meta: Readonly<Record<string, string | number>>): string {
  const rows = regions.flatMap(({ region, spectrum, fits }) =>
    fits.flatMap((fit, rank) => fit.law.parameters.map((parameter, k) => ({ region: layout.regions[region], spectrum, fit, rank, parameter, k }))),
  );
  const column = (pick: (row: (typeof rows)[number]) => number): number[] => rows.map(pick);
  // Angles are written in degrees.
  const shown = ({ parameter }: (typeof rows)[number]): number => (parameter.unit === 'rad' ? degrees : 1);
  return writeCsv(
    [
      { name: 'region', type: 'string', values: rows.map(({ region }) => (region ? (layout.kind === 'rings' ? 'sector' : 'box') : 'integrated')) },
      { name: 'inner', unit: 'kpc', type: 'float64', values: column(({ region }) => region?.innerKpc ?? NaN) },
      { name: 'outer', unit: 'kpc', type: 'float64', values: column(({ region }) => region?.outerKpc ?? NaN) },
      { name: 'azimuth', unit: 'deg', type: 'float64', values: column(({ region }) => (region?.azimuth ?? NaN) * degrees) },
      { name: 'across', unit: 'kpc', type: 'float64', values: column(({ region }) => region?.alongKpc ?? NaN) },
      { name: 'law', type: 'string', values: rows.map(({ fit }) => fit.law.name) },
      { name: 'rank', type: 'int64', values: column(({ rank }) => rank + 1), description: 'by BIC, 1 is the best' },
      { name: 'chi2', type: 'float64', values: column(({ fit }) => fit.chi2) },
      { name: 'dof', type: 'int64', values: column(({ fit }) => fit.degreesOfFreedom) },
      { name: 'AIC', type: 'float64', values: column(({ fit }) => fit.aic) },
      { name: 'BIC', type: 'float64', values: column(({ fit }) => fit.bic) },
      { name: 'parameter', type: 'string', values: rows.map(({ parameter }) => parameter.name) },
      { name: 'parameter_unit', type: 'string', values: rows.map(({ parameter }) => (parameter.unit === 'rad' ? 'deg' : parameter.unit)) },
      { name: 'value', type: 'float64', values: column((row) => row.fit.values[row.k] * shown(row)) },
      { name: 'error', type: 'float64', values: column((row) => row.fit.errors[row.k] * shown(row)) },
    ],
    meta,
  );
}
