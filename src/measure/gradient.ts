import { weightedLine } from '../math/statistics.ts';
import { offsetsKpc } from '../sky/grid.ts';
import { InputError } from '../units/input-error.ts';
import { pixelsPerBeam, type DiscOrientation, type MapFrame } from './disc.ts';

/** The change of a quantity along an axis on the sky, and its value at the centre. */
export interface AxisGradient {
  /** Per kpc. */
  readonly gradient: number;
  readonly gradientError: number;
  readonly atCentre: number;
  readonly pixels: number;
}

/** Where a gradient is measured: along an axis through the centre. */
export interface GradientAxis {
  /** Direction of growth, north through east, rad. */
  readonly angle: number;
  /** Pixels farther from the axis, or farther out along it, are left aside, kpc; all are taken where left out. */
  readonly halfWidthKpc?: number;
  readonly halfLengthKpc?: number;
}

/**
 * Weighted straight-line fit of a map (such as RM) over the offset along an axis. Errors per pixel;
 * without them, or where they are all zero, the scatter about the line sets the error. Pixels of one
 * beam share their noise. NaN where fewer than three pixels or no range are left.
 */
export function axisGradient(
  values: Float64Array,
  errors: Float64Array | undefined,
  frame: MapFrame,
  orientation: Pick<DiscOrientation, 'distanceKpc' | 'centre'>,
  axis: GradientAxis,
): AxisGradient {
  const { northKpc, eastKpc } = offsetsKpc(frame.wcs, frame.nx, frame.ny, orientation.distanceKpc, orientation.centre);
  const [cos, sin] = [Math.cos(axis.angle), Math.sin(axis.angle)];
  const { halfWidthKpc = Infinity, halfLengthKpc = Infinity } = axis;
  const [x, y, weights]: number[][] = [[], [], []];
  const isNoisy = errors !== undefined && errors.some((error) => error > 0);
  values.forEach((value, k) => {
    const along = northKpc[k] * cos + eastKpc[k] * sin;
    const across = eastKpc[k] * cos - northKpc[k] * sin;
    if (!Number.isFinite(value) || !(Math.abs(across) <= halfWidthKpc && Math.abs(along) <= halfLengthKpc)) return;
    if (isNoisy && !(errors[k] > 0)) return;
    x.push(along);
    y.push(value);
    weights.push(isNoisy ? errors[k] ** -2 : 1);
  });
  if (x.length < 3) return { gradient: NaN, gradientError: NaN, atCentre: NaN, pixels: x.length };
  const line = weightedLine(x, y, weights);
  const scatter = isNoisy ? 1 : Math.sqrt(line.chi2 / (x.length - 2));
  const shared = Math.sqrt(Math.min(pixelsPerBeam(frame), x.length / 3));
  return { gradient: line.slope, gradientError: line.slopeError * scatter * shared, atCentre: line.intercept, pixels: x.length };
}

/** How a gradient changes with wavelength: one number with an error. */
export interface GradientChange {
  /** d(gradient)/d(lambda^2), per kpc and m^2. */
  readonly change: number;
  readonly changeError: number;
  /** |change|/error. */
  readonly significance: number;
}

/**
 * The slope of gradients over lambda^2 (m^2), one gradient per band: 0 where every band sees through
 * the same layers. Throws InputError for fewer than two bands.
 */
export function gradientChange(lambda2M2: readonly number[], gradients: readonly AxisGradient[]): GradientChange {
  if (gradients.length < 2) throw new InputError('a change of gradient with wavelength needs rotation measures in two bands or more');
  const isNoisy = gradients.every(({ gradientError }) => gradientError > 0);
  const weights = gradients.map(({ gradientError }) => (isNoisy ? gradientError ** -2 : 1));
  const line = weightedLine(lambda2M2, gradients.map(({ gradient }) => gradient), weights);
  const changeError = isNoisy ? line.slopeError : 0;
  return { change: line.slope, changeError, significance: Math.abs(line.slope) / changeError };
}
