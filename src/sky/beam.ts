import { InputError } from '../units/input-error.ts';
import { frequencyOf, multiplyImage, transformImage, zeroImage } from '../math/fft.ts';
import type { Beam } from '../scene/types.ts';
import { arcsec, wcsFromGrid } from './grid.ts';
import type { SkyGrid, StokesCube } from './types.ts';
import type { CelestialWcs } from './wcs-types.ts';

/** Where a beam is nothing beside its peak (1.5e-11), in FWHM: the width of margins. */
const reachFwhm = 3;
const sigmaPerFwhm = 1 / Math.sqrt(8 * Math.LN2);

/** Solid angle of a Gaussian beam, sr: pi/(4 ln 2) major minor. */
export function beamSolidAngleSr(beam: Beam): number {
  return (Math.PI / (4 * Math.LN2)) * beam.majorArcsec * beam.minorArcsec * arcsec ** 2;
}

/** Pixels by which an image must grow on each side so that the beam sees all that it should: 3 FWHM. */
export function beamMargin(beam: Beam | undefined, grid: SkyGrid): number {
  return beam ? Math.ceil((reachFwhm * beam.majorArcsec) / grid.pixelArcsec) : 0;
}

/**
 * A beam as the covariance of a Gaussian over pixel numbers, pixel^2; x counts columns, y rows:
 * the beam is exp(-d^T C^-1 d / 2).
 */
export interface PixelBeam {
  readonly xx: number;
  readonly xy: number;
  readonly yy: number;
}

/**
 * A beam over the pixels of any map near its reference point, turned or not. Throws InputError for a
 * beam narrower than one pixel, which a map of such pixels cannot show.
 */
export function pixelBeam(beam: Beam, cd: CelestialWcs['cd']): PixelBeam {
  const { majorArcsec, minorArcsec, angle } = beam;
  const pixelArcsec = 3600 * Math.sqrt(Math.abs(cd[0] * cd[3] - cd[1] * cd[2]));
  // A beam of exactly one pixel must not fall to rounding.
  if (!(minorArcsec >= pixelArcsec * (1 - 1e-9) && majorArcsec >= minorArcsec)) {
    throw new InputError(
      `a beam of ${majorArcsec} x ${minorArcsec} arcsec on pixels of ${Number(pixelArcsec.toPrecision(6))} arcsec; ` +
        'its minor axis must be at least one pixel wide and no wider than its major axis',
    );
  }
  // Principal axes in the projection plane (east, north), brought to pixels by the inverse of CD.
  const [majorX, majorY] = pixelsFromPlane(cd, Math.sin(angle), Math.cos(angle));
  const [minorX, minorY] = pixelsFromPlane(cd, Math.cos(angle), -Math.sin(angle));
  const major = ((majorArcsec / 3600) * sigmaPerFwhm) ** 2;
  const minor = ((minorArcsec / 3600) * sigmaPerFwhm) ** 2;
  return {
    xx: major * majorX * majorX + minor * minorX * minorX,
    xy: major * majorX * majorY + minor * minorX * minorY,
    yy: major * majorY * majorY + minor * minorY * minorY,
  };
}

function pixelsFromPlane(cd: CelestialWcs['cd'], east: number, north: number): [x: number, y: number] {
  const determinant = cd[0] * cd[3] - cd[1] * cd[2];
  return [(cd[3] * east - cd[1] * north) / determinant, (cd[0] * north - cd[2] * east) / determinant];
}

/** How far a beam reaches along columns and rows, pixels: 3 FWHM of its profile along each. */
export function beamReach({ xx, yy }: PixelBeam): { x: number; y: number } {
  const reach = reachFwhm / sigmaPerFwhm;
  return { x: Math.ceil(reach * Math.sqrt(xx)), y: Math.ceil(reach * Math.sqrt(yy)) };
}

/**
 * The beam's transfer function on the frequencies of a transform of width x height samples,
 * exp(-2 pi^2 f^T C f), 1 at zero frequency. At the Nyquist frequencies, which stand for both signs,
 * the mean over the signs: the filter is even, so that real planes stay real.
 */
export function beamTransfer({ xx, xy, yy }: PixelBeam, width: number, height: number): Float64Array {
  const transfer = new Float64Array(width * height);
  for (let row = 0, k = 0; row < height; row++) {
    const fy = frequencyOf(row, height);
    for (let column = 0; column < width; column++, k++) {
      const fx = frequencyOf(column, width);
      const nyquist = column === width / 2 || row === height / 2;
      const axes = 2 * Math.PI ** 2 * (xx * fx * fx + yy * fy * fy);
      const turn = 4 * Math.PI ** 2 * xy * fx * fy;
      transfer[k] = nyquist ? (Math.exp(-axes - turn) + Math.exp(turn - axes)) / 2 : Math.exp(-axes - turn);
    }
  }
  return transfer;
}

/**
 * A function that convolves planes [row * nx + column] with a beam of unit integral, two at a time
 * (any two real planes, such as Q and U, share one transform), in place. The flux is kept; beyond
 * the planes' edges the sky is taken as empty, so bring a margin (`beamMargin`) and crop it.
 * The function throws InputError where a plane has blank (NaN) pixels, which have no transform.
 */
export function beamConvolver(
  beam: PixelBeam,
  nx: number,
  ny: number,
): (first: Float64Array, second?: Float64Array) => void {
  const reach = beamReach(beam);
  const image = zeroImage(nx + reach.x, ny + reach.y);
  const transfer = beamTransfer(beam, image.width, image.height);
  return (first, second) => {
    refuseBlanks(first, second);
    image.real.fill(0);
    image.imaginary.fill(0);
    for (let row = 0; row < ny; row++) {
      image.real.set(first.subarray(row * nx, (row + 1) * nx), row * image.width);
      if (second) image.imaginary.set(second.subarray(row * nx, (row + 1) * nx), row * image.width);
    }
    transformImage(image, 'forward');
    multiplyImage(image, transfer);
    transformImage(image, 'inverse');
    for (let row = 0; row < ny; row++) {
      const start = row * image.width;
      first.set(image.real.subarray(start, start + nx), row * nx);
      second?.set(image.imaginary.subarray(start, start + nx), row * nx);
    }
  };
}

function refuseBlanks(...planes: (Float64Array | undefined)[]): void {
  for (const plane of planes) {
    const blanks = plane?.reduce((count, value) => count + (Number.isFinite(value) ? 0 : 1), 0) ?? 0;
    if (blanks > 0) {
      throw new InputError(
        `a map with ${blanks} blank or infinite pixels cannot be convolved with a beam; ` +
          'cut it to its filled part, or fill the blanks first',
      );
    }
  }
}

/** Planes of I, Q and U, each [plane * pixels + pixel]; as many of U as of Q. */
export type StokesPlanes = Readonly<Record<'I' | 'Q' | 'U', Float64Array>>;

/**
 * Brings planes of the sky on a grid (Jy/sr, with its margin still on) to Jy/beam in place, as the
 * beam sees them. Throws InputError for blank pixels and a beam narrower than a pixel.
 */
export function beamPlanes({ I, Q, U }: StokesPlanes, beam: Beam, grid: SkyGrid): void {
  const { nx, ny } = grid;
  const convolve = beamConvolver(pixelBeam(beam, wcsFromGrid(grid).cd), nx, ny);
  const solidAngle = beamSolidAngleSr(beam);
  const plane = (planes: Float64Array, index: number): Float64Array => planes.subarray(index * nx * ny, (index + 1) * nx * ny);
  for (let index = 0; index < Q.length / (nx * ny); index++) convolve(plane(Q, index), plane(U, index));
  const planesI = I.length / (nx * ny);
  for (let index = 0; index < planesI; index += 2) convolve(plane(I, index), index + 1 < planesI ? plane(I, index + 1) : undefined);
  for (const planes of [I, Q, U]) for (let k = 0; k < planes.length; k++) planes[k] *= solidAngle;
}

/**
 * A sky cube (Jy/sr, with its margin still on) as the beam sees it, Jy/beam. Throws InputError where
 * the cube has been through a beam already, has blank pixels, or the beam is narrower than a pixel.
 */
export function applyBeam(cube: StokesCube, beam: Beam): StokesCube {
  if (cube.unit !== 'Jy/sr') {
    throw new InputError(`the maps of band ${cube.band} are in ${cube.unit}: a beam acts on Jy/sr only`);
  }
  const seen = { I: cube.I.slice(), Q: cube.Q.slice(), U: cube.U.slice() };
  beamPlanes(seen, beam, cube.grid);
  return { ...cube, ...seen, unit: 'Jy/beam', beam };
}
