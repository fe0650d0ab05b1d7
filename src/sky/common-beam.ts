import { InputError } from '../units/input-error.ts';
import type { Beam } from '../scene/types.ts';
import { beamConvolver, beamSolidAngleSr, pixelBeam, type PixelBeam } from './beam.ts';
import type { BrightnessUnit } from './types.ts';
import type { CelestialWcs } from './wcs-types.ts';

/** Axes that agree to this share are one. */
const sameShare = 1e-6;

/** A beam as the second moments of its shape, proportional to its covariance, arcsec^2. */
interface Moments {
  readonly north: number;
  readonly east: number;
  readonly cross: number;
}

function momentsOf({ majorArcsec, minorArcsec, angle }: Beam): Moments {
  const [cos, sin] = [Math.cos(angle), Math.sin(angle)];
  const [major, minor] = [majorArcsec ** 2, minorArcsec ** 2];
  return {
    north: major * cos * cos + minor * sin * sin,
    east: major * sin * sin + minor * cos * cos,
    cross: (major - minor) * cos * sin,
  };
}

/** Major and minor squares and the angle of the major axis of second moments. */
function axesOf({ north, east, cross }: Moments): { major: number; minor: number; angle: number } {
  const middle = (north + east) / 2;
  const half = Math.hypot((north - east) / 2, cross);
  return { major: middle + half, minor: middle - half, angle: Math.atan2(2 * cross, north - east) / 2 };
}

/**
 * The beam that turns `from` into `to` by convolution (covariances of Gaussians add); undefined where
 * they are the same. Throws InputError where `to` is narrower than `from` in some direction.
 */
export function beamBetween(from: Beam, to: Beam): Beam | undefined {
  const [a, b] = [momentsOf(from), momentsOf(to)];
  const { major, minor, angle } = axesOf({ north: b.north - a.north, east: b.east - a.east, cross: b.cross - a.cross });
  const rounding = sameShare * to.majorArcsec ** 2;
  if (minor < -rounding) {
    throw new InputError(
      `a map with a beam of ${beamText(from)} cannot be brought to ${beamText(to)}, which is narrower in some direction; take a wider common beam`,
    );
  }
  if (major <= rounding) return undefined;
  return { majorArcsec: Math.sqrt(major), minorArcsec: Math.sqrt(Math.max(minor, 0)), angle };
}

/**
 * The smallest round beam that every one of these can be convolved to: as wide as the widest major
 * axis. Equal beams are kept as they are, elliptical or not.
 */
export function commonBeam(beams: readonly Beam[]): Beam {
  if (beams.length === 0) throw new InputError('a common beam needs at least one map with a beam');
  const [first] = beams;
  const isSame = beams.every((beam) => {
    const [a, b] = [momentsOf(beam), momentsOf(first)];
    const limit = sameShare * first.majorArcsec ** 2;
    return Math.abs(a.north - b.north) < limit && Math.abs(a.east - b.east) < limit && Math.abs(a.cross - b.cross) < limit;
  });
  if (isSame) return first;
  const widest = Math.max(...beams.map((beam) => beam.majorArcsec));
  return { majorArcsec: widest, minorArcsec: widest, angle: 0 };
}

/** Where the pixels of a plane lie. */
export interface PlaneFrame {
  readonly wcs: CelestialWcs;
  readonly nx: number;
  readonly ny: number;
}

/** What brings planes of one beam to another. */
export interface BeamChange {
  /** What the rms of noise correlated like the first beam becomes, in the new unit over the old. */
  readonly noiseFactor: number;
  /** A plane, or two at the cost of one, as seen with the other beam. Blank pixels count as dark and stay blank; so does what lies beyond the map. */
  planes(first: Float64Array, second?: Float64Array): readonly Float64Array[];
}

/**
 * What turns planes of the beam `from` into planes of the beam `to`: brightness per beam grows with the
 * beam, per steradian it does not. Undefined where the two are the same; throws InputError where `to` is
 * narrower in some direction.
 */
export function beamChange({ wcs, nx, ny }: PlaneFrame, from: Beam, to: Beam, unit: BrightnessUnit): BeamChange | undefined {
  const between = beamBetween(from, to);
  if (!between) return undefined;
  const scale = unit === 'Jy/beam' ? beamSolidAngleSr(to) / beamSolidAngleSr(from) : 1;
  const convolve = beamConvolver(narrowBeam(between, wcs), nx, ny);
  return {
    noiseFactor: scale * noiseShare(from, between),
    planes: (...planes) => {
      const given = planes.filter((plane) => plane !== undefined);
      const results = given.map((values) => values.map((value) => (Number.isFinite(value) ? scale * value : 0)));
      convolve(results[0], results[1]);
      given.forEach((values, which) =>
        values.forEach((value, k) => {
          if (!Number.isFinite(value)) results[which][k] = NaN;
        }),
      );
      return results;
    },
  };
}

/**
 * What is left of the rms of noise whose autocorrelation is that of the beam `from` after convolution
 * with `between`: (det C/det(C + 2 B))^1/4 of the covariances of the autocorrelation and of the kernel.
 */
function noiseShare(from: Beam, between: Beam): number {
  const [a, b] = [momentsOf(from), momentsOf(between)];
  const determinant = (north: number, east: number, cross: number): number => north * east - cross * cross;
  const before = determinant(a.north, a.east, a.cross);
  return Math.sqrt(Math.sqrt(before / determinant(a.north + 2 * b.north, a.east + 2 * b.east, a.cross + 2 * b.cross)));
}

/** A kernel may be narrower than a pixel, or a line: its transfer function stays exact. */
function narrowBeam(beam: Beam, wcs: CelestialWcs): PixelBeam {
  const pixelArcsec = Math.sqrt(Math.abs(wcs.cd[0] * wcs.cd[3] - wcs.cd[1] * wcs.cd[2])) * 3600;
  const stretch = Math.max(1, pixelArcsec / Math.max(beam.minorArcsec, 1e-12));
  if (stretch === 1) return pixelBeam(beam, wcs.cd);
  // Covariances are linear in the squares of the axes: two wide beams stand for the narrow one.
  const wide = 2 * Math.max(pixelArcsec, beam.majorArcsec);
  const round = pixelBeam({ majorArcsec: wide, minorArcsec: wide, angle: 0 }, wcs.cd);
  const longer = Math.hypot(wide, Math.sqrt(beam.majorArcsec ** 2 - beam.minorArcsec ** 2));
  const stretched = pixelBeam({ majorArcsec: longer, minorArcsec: wide, angle: beam.angle }, wcs.cd);
  const share = (beam.minorArcsec / wide) ** 2;
  const part = (key: 'xx' | 'xy' | 'yy'): number => stretched[key] - round[key] + share * round[key];
  return { xx: part('xx'), xy: part('xy'), yy: part('yy') };
}

function beamText({ majorArcsec, minorArcsec, angle }: Beam): string {
  const [major, minor] = [majorArcsec, minorArcsec].map((axis) => Number(axis.toPrecision(4)));
  return major === minor ? `${major} arcsec` : `${major} x ${minor} arcsec at ${Number(((angle * 180) / Math.PI).toPrecision(4))} deg`;
}

