import type { Beam } from '../scene/types.ts';
import { factorBanded, logDeterminant, whitenBanded } from './banded-cholesky.ts';
import type { BandedMatrix } from './banded-cholesky.ts';
import { makeLattice, windowMeans } from './lattice.ts';
import type { Lattice } from './lattice.ts';
import { windowCovariance } from './noise-covariance.ts';
import { beamAxes, beamPixels, sameBeam } from './pixel-axes.ts';
import type { PixelAxes } from './pixel-axes.ts';
import type { DataPlane, DataSet } from './types.ts';
import { InputError } from '../units/input-error.ts';

/** What one whitened residual is about. */
export interface ResidualPlace {
  /** Index into the data set's planes. */
  readonly plane: number;
  /** Where in the map, from 1 as in FITS, not whole. */
  readonly pixelX: number;
  readonly pixelY: number;
  /** Whole-number place among the plane's points, along the two axes of their lattice (or of the pixels). */
  readonly slow: number;
  readonly fast: number;
}

/** A Gaussian likelihood of a data set: ln L = logNormalisation - chi2/2, chi2 = |residuals|^2. */
export interface Likelihood {
  /** Independent values, planes x area/beam solid angle: what BIC counts. */
  readonly count: number;
  /** Residuals, about `count` (lattice points are whole): what chi2 of a true model averages to. */
  readonly residualCount: number;
  readonly logNormalisation: number;
  readonly places: readonly ResidualPlace[];
  /** Whitened residuals of a model's planes; throws where a plane is missing or not finite. */
  readonly residuals: (model: readonly Float64Array[]) => Float64Array;
}

/**
 * The Gaussian likelihood of maps whose noise is correlated as the beam. Each plane is compressed to
 * means under beam-shaped windows, one per beam solid angle, weighted by 1/noise; their exact
 * covariance C = L L^T follows from the noise model, and the residuals are L^-1 (data - model)
 * (own design). Planes without a correlation are compared pixel by pixel. Throws InputError where
 * nothing is left to compare.
 */
export function makeLikelihood(data: DataSet): Likelihood {
  const whiteners: Whitener[] = [];
  const planes = data.planes.map((plane) => {
    const unmasked = unmaskedPixels(plane);
    const whitener = findWhitener(whiteners, plane, unmasked) ?? makeWhitener(data.axes, plane, unmasked);
    if (!whiteners.includes(whitener)) whiteners.push(whitener);
    return preparePlane(whitener, plane);
  });
  const places = planes.flatMap(({ whitener: { column, row, lattice } }, plane) =>
    Array.from(column, (x, k): ResidualPlace => ({ plane, pixelX: x + 1, pixelY: row[k] + 1, slow: lattice?.slow[k] ?? row[k], fast: lattice?.fast[k] ?? x })),
  );
  const residuals = (model: readonly Float64Array[]): Float64Array => {
    if (model.length !== planes.length) {
      throw new Error(`The model gave ${model.length} maps for ${planes.length} planes of data.`);
    }
    const all = new Float64Array(places.length);
    let at = 0;
    planes.forEach((plane, index) => {
      const part = whiten(plane, model[index], index);
      all.set(part, at);
      at += part.length;
    });
    return all;
  };
  return {
    count: planes.reduce((sum, { whitener }) => sum + whitener.beams, 0),
    residualCount: places.length,
    logNormalisation: planes.reduce((sum, plane) => sum + plane.logNormalisation, 0),
    places,
    residuals,
  };
}

/** |z|^2. */
export function chiSquared(residuals: Float64Array): number {
  let sum = 0;
  for (const value of residuals) sum += value * value;
  return sum;
}

/** ln L of whitened residuals. */
export function logLikelihood(likelihood: Likelihood, residuals: Float64Array): number {
  return likelihood.logNormalisation - chiSquared(residuals) / 2;
}

/** What planes with the same mask and noise correlation share. */
interface Whitener {
  readonly correlation: Beam | undefined;
  readonly unmasked: Uint8Array;
  readonly beams: number;
  readonly column: Float64Array;
  readonly row: Float64Array;
  /** Without them every unmasked pixel counts by itself. */
  readonly lattice?: Lattice;
  readonly factor?: BandedMatrix;
}

interface PreparedPlane {
  readonly whitener: Whitener;
  readonly values: Float64Array;
  /** 1/rms per pixel, 0 where masked. */
  readonly inverseNoise: Float64Array;
  readonly logNormalisation: number;
}

/** 1 where a plane has a value and a noise. */
function unmaskedPixels(plane: DataPlane): Uint8Array {
  const { values, noise } = plane;
  return Uint8Array.from(values, (value, p) => {
    const rms = typeof noise === 'number' ? noise : noise[p];
    return Number.isFinite(value) && rms > 0 && Number.isFinite(rms) ? 1 : 0;
  });
}

function findWhitener(known: readonly Whitener[], plane: DataPlane, unmasked: Uint8Array): Whitener | undefined {
  return known.find(
    (other) => sameBeam(other.correlation, plane.correlation) && other.unmasked.every((value, p) => value === unmasked[p]),
  );
}

function makeWhitener(axes: PixelAxes, plane: DataPlane, unmasked: Uint8Array): Whitener {
  const { correlation } = plane;
  if (correlation && beamPixels(axes, correlation) > 1) {
    const lattice = makeLattice(axes, correlation, unmasked);
    if (lattice.count === 0) throw new InputError('the unmasked part of a map is smaller than one beam');
    const factor = windowCovariance(lattice, beamAxes(axes, correlation), axes.nx);
    factorBanded(factor);
    const { beams, column, row } = lattice;
    return { correlation, unmasked, beams, column, row, lattice, factor };
  }
  const pixels = Array.from(unmasked.keys()).filter((p) => unmasked[p] === 1);
  if (pixels.length === 0) throw new InputError('every pixel of a map is blank or masked');
  return {
    correlation,
    unmasked,
    beams: pixels.length,
    column: Float64Array.from(pixels, (p) => p % axes.nx),
    row: Float64Array.from(pixels, (p) => Math.floor(p / axes.nx)),
  };
}

function preparePlane(whitener: Whitener, plane: DataPlane): PreparedPlane {
  const { unmasked, lattice, factor, beams } = whitener;
  const { noise } = plane;
  const rms = (p: number): number => (typeof noise === 'number' ? noise : noise[p]);
  const inverseNoise = Float64Array.from(unmasked, (value, p) => (value === 1 ? 1 / rms(p) : 0));
  // The value at a point, in the map's unit, is the signal-to-noise mean over this mean of 1/rms.
  let logInverse = 0;
  if (lattice) for (const mean of windowMeans(lattice, inverseNoise)) logInverse += Math.log(mean);
  else for (const value of inverseNoise) if (value > 0) logInverse += Math.log(value);
  const count = lattice ? lattice.count : beams;
  const logNormalisation = logInverse - (factor ? logDeterminant(factor) : 0) - (count / 2) * Math.log(2 * Math.PI);
  return { whitener, values: plane.values, inverseNoise, logNormalisation };
}

/** Whitened (data - model) of one plane. */
function whiten(plane: PreparedPlane, model: Float64Array, index: number): Float64Array {
  const { whitener, values, inverseNoise } = plane;
  if (model.length !== values.length) {
    throw new Error(`Map ${index + 1} of the model has ${model.length} pixels, the data have ${values.length}.`);
  }
  const ratio = new Float64Array(values.length);
  for (let p = 0; p < values.length; p++) {
    if (inverseNoise[p] === 0) continue;
    ratio[p] = (values[p] - model[p]) * inverseNoise[p];
    if (!Number.isFinite(ratio[p])) {
      throw new Error(`Map ${index + 1} of the model is ${model[p]} at pixel ${p}: no likelihood can be given.`);
    }
  }
  if (whitener.lattice && whitener.factor) return whitenBanded(whitener.factor, windowMeans(whitener.lattice, ratio));
  return ratio.filter((_, p) => whitener.unmasked[p] === 1);
}
