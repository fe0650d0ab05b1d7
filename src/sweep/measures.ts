import { asymmetry, type AsymmetryAxis } from '../measure/asymmetry.ts';
import { axisGradient } from '../measure/gradient.ts';
import { fitHarmonics, type HarmonicFit } from '../measure/harmonics.ts';
import { depolarization } from '../sky/derived.ts';
import { layoutBeams, layoutMean, type BandView, type SkyView } from './sky-view.ts';
import type { MeasureName } from './types.ts';

/** A column of a sweep's table that is measured. */
export interface SweepColumn {
  readonly name: string;
  /** '' for a pure number. */
  readonly unit: string;
  readonly description: string;
  /** In figures and sentences, such as `asymmetry, L20`. */
  readonly label: string;
  /** Name of the column that holds its standard error. */
  readonly error?: string;
  /** How many of its errors it lies from 0, where that is asked for: what sentences of crossings are about. */
  readonly significance?: string;
  /** Worth a curve of its own. */
  readonly drawn: boolean;
}

/** What a measure needs to know of a scene to name its columns: its bands, shortest wavelength last. */
export interface ColumnBands {
  readonly names: readonly string[];
  readonly shortest: string;
}

/** One kind of measurement: its columns, and their values on a sky, in the same order. */
interface Measure {
  columns(bands: ColumnBands): readonly SweepColumn[];
  values(view: SkyView, bands: ColumnBands): readonly number[];
}

/** Harmonics are fitted up to order 3, and kept up to this one. */
const keptOrders = [1, 2] as const;
const highestOrder = 3;
const degrees = 180 / Math.PI;

const column = (name: string, unit: string, label: string, description: string, more: Partial<SweepColumn> = {}): SweepColumn => ({ name, unit, label, description, drawn: true, ...more });
const errorOf = (of: SweepColumn): SweepColumn => ({ name: of.error ?? `${of.name}_error`, unit: of.unit, label: `error of ${of.label}`, description: 'standard error, from the noise', drawn: false });
const withError = (of: SweepColumn): SweepColumn[] => {
  const full = { ...of, error: `${of.name}_error` };
  return [full, errorOf(full)];
};

const measures: Readonly<Record<MeasureName, Measure>> = {
  asymmetry: {
    columns: ({ names }) =>
      names.flatMap((band) => [
        ...withError(column(`asymmetry_${band}`, '', `asymmetry, ${band}`, '(approaching - receding)/(their sum) of P round the ring; beside the axes of a disc steeper than 75 deg', { significance: `significance_${band}` })),
        ...withError(column(`near_far_${band}`, '', `near-far asymmetry, ${band}`, '(near - far)/(their sum) of P', { significance: `near_far_significance_${band}` })),
      ]),
    values: (view) => view.bands.flatMap((band) => (['approaching-receding', 'near-far'] as const).flatMap((axis) => {
      const { value, error } = ringAsymmetry(view, band, axis);
      return [value, error];
    })),
  },
  harmonics: {
    columns: ({ names }) =>
      names.flatMap((band) => keptOrders.flatMap((order) => [
        ...withError(column(`a${order}_${band}`, '', `a${order}/a0, ${band}`, `amplitude of harmonic ${order} of P round the ring over the mean; blank for a disc steeper than 75 deg`)),
        ...withError(column(`phase${order}_${band}`, 'deg', `phase of a${order}, ${band}`, `galaxy azimuth at which harmonic ${order} peaks`, { drawn: false })),
      ])),
    values: (view) => view.bands.flatMap((band) => {
      const fit = ringHarmonics(view, band);
      return keptOrders.flatMap((order) => {
        const one = fit?.harmonics[order - 1];
        if (!fit || !one) return [NaN, NaN, NaN, NaN];
        const ratio = one.amplitude / fit.mean;
        return [ratio, Math.hypot(one.amplitudeError, ratio * fit.meanError) / Math.abs(fit.mean), one.phase * degrees, one.phaseError * degrees];
      });
    }),
  },
  polarization: {
    columns: ({ names }) =>
      names.flatMap((band) => [
        ...withError(column(`fraction_${band}`, '', `polarized fraction, ${band}`, 'mean P over mean I of the ring')),
        column(`integrated_fraction_${band}`, '', `integrated fraction, ${band}`, '|sum of Q + iU| over the sum of I of the whole map'),
      ]),
    values: (view) => view.bands.flatMap((band) => {
      const [P, I] = [layoutMean(view, band.P), layoutMean(view, band.centre.I ?? [])];
      const error = band.sigma / Math.sqrt(layoutBeams(view));
      const { Q, U, I: whole = new Float64Array(0) } = band.centre;
      const total = (plane: Float64Array): number => plane.reduce((sum, value) => sum + value, 0);
      return [P / I, Math.hypot(error, (P / I) * error) / I, Math.hypot(total(Q), total(U)) / total(whole)];
    }),
  },
  depolarization: {
    columns: ({ names, shortest }) =>
      names.filter((band) => band !== shortest).flatMap((band) => withError(column(`depolarization_${band}`, '', `depolarization, ${band} to ${shortest}`, `P of the ring over that at ${shortest}, without the synchrotron spectrum`))),
    values: (view, { shortest }) => {
      const last = getBand(view, shortest);
      const beams = layoutBeams(view);
      const alpha = (view.scene.cosmicRays.index - 1) / 2;
      return view.bands.filter((band) => band !== last).flatMap((band) => {
        const [far, near] = [layoutMean(view, band.P), layoutMean(view, last.P)];
        const [value] = depolarization([far], [near], band.centre.frequencyHz, last.centre.frequencyHz, alpha);
        return [value, Math.abs(value) * Math.hypot(band.sigma / far, last.sigma / near) / Math.sqrt(beams)];
      });
    },
  },
  gradient: {
    columns: () => [
      ...withError(column('rm_gradient_major', 'rad m-2 kpc-1', 'RM gradient, major axis', 'growth of RM towards the receding end, in the ring, over all bands')),
      ...withError(column('rm_gradient_minor', 'rad m-2 kpc-1', 'RM gradient, minor axis', 'growth of RM towards position angle + 90 deg')),
    ],
    values: (view) => {
      const { rm, rmError } = view.rotation();
      const inside = rm.map((value, k) => (view.layout.regionOf[k] < 0 ? NaN : value));
      const noisy = view.bands.every((band) => band.sigma > 0);
      return [0, Math.PI / 2].flatMap((turn) => {
        const { gradient, gradientError } = axisGradient(inside, noisy ? rmError : undefined, view.frame, view.orientation, { angle: view.orientation.positionAngle + turn });
        return [gradient, gradientError];
      });
    },
  },
  'origin-height': {
    columns: ({ names }) => names.map((band) => column(`origin_height_${band}`, 'kpc', `height of origin, ${band}`, 'mean height from which P of the ring comes, weighted by P, before any beam')),
    values: (view) => view.bands.map((band) => layoutMean(view, band.originKpc, band.P)),
  },
  detectability: {
    columns: ({ names }) =>
      names.flatMap((band) => [
        column(`significance_${band}`, '', `significance of the asymmetry, ${band}`, 'the approaching-receding asymmetry over its error'),
        column(`near_far_significance_${band}`, '', `significance of the near-far asymmetry, ${band}`, 'over its error', { drawn: false }),
        column(`seen_${band}`, '', `share of the ring seen, ${band}`, 'pixels whose P is above the threshold times the noise'),
      ]),
    values: (view) => view.bands.flatMap((band) => {
      const [sides, depth] = (['approaching-receding', 'near-far'] as const).map((axis) => {
        const { value, error } = ringAsymmetry(view, band, axis);
        return Math.abs(value) / error;
      });
      return [sides, depth, layoutMean(view, band.centre.P.map((value) => (Number.isNaN(value) ? NaN : Number(value > view.threshold * band.sigma))))];
    }),
  },
};

/** The columns of a list of measures, in their order. */
export function sweepColumns(names: readonly MeasureName[], bands: ColumnBands): readonly SweepColumn[] {
  const all = names.flatMap((name) => measures[name].columns(bands));
  const known = new Set(all.map(({ name }) => name));
  return all.map(({ significance, ...rest }) => ({ ...rest, ...(significance !== undefined && known.has(significance) && { significance }) }));
}

/** Their values on a sky; NaN where one cannot be told. */
export function measureView(names: readonly MeasureName[], view: SkyView, bands: ColumnBands): number[] {
  return names.flatMap((name) => [...measures[name].values(view, bands)]);
}

function ringAsymmetry(view: SkyView, band: BandView, axis: AsymmetryAxis): ReturnType<typeof asymmetry> {
  return asymmetry(view.azimuth, band.regions.map(({ P }) => P.value), band.regions.map(({ P }) => P.error), axis);
}

function ringHarmonics(view: SkyView, band: BandView): HarmonicFit | undefined {
  if (view.layout.kind !== 'rings') return undefined;
  const values = band.regions.map(({ P }) => P.value);
  const filled = values.filter(Number.isFinite).length;
  return filled > 2 * highestOrder + 1 ? fitHarmonics(view.azimuth, values, band.regions.map(({ P }) => P.error), highestOrder) : undefined;
}

function getBand(view: SkyView, name: string): BandView {
  const found = view.bands.find((band) => band.name === name);
  if (!found) throw new Error(`the sky has no band ${name}`);
  return found;
}
