import { InputError } from '../units/input-error.ts';
import { discCoordinates, pixelsPerBeam } from './disc.ts';
import type { DiscOrientation, MapFrame } from './disc.ts';
import { checkEdges, findBin, rounding } from './edges.ts';
import { measureRegions } from './region.ts';
import type { MeasuredMaps, RegionValues } from './region.ts';

/** Rings between neighbouring edges (kpc, in the disc), each cut into equal sectors of azimuth. */
export interface RingSpec {
  readonly edgesKpc: readonly number[];
  readonly sectors: number;
  /** Galaxy azimuth on which the first sector is centred, rad; 0 where left out. */
  readonly firstAzimuth?: number;
}

/** One sector of a ring. */
export interface Sector extends RegionValues {
  readonly innerKpc: number;
  readonly outerKpc: number;
  /** Galaxy azimuth of the sector's middle, rad: sector k is centred on the first one's azimuth + 2 pi k/sectors. */
  readonly azimuth: number;
}

/** Beyond this angle between disc and face-on, a thin disc cannot be deprojected, deg. */
const steepestDeg = 75;

/**
 * Measures rings and sectors of a thin disc: result[ring][sector]. The first sector is centred on
 * azimuth 0, the receding half of the major axis, unless the spec says otherwise, and a pixel belongs to the sector of its centre.
 * Throws InputError for a disc more than 75 deg from face-on, and for edges or sectors that make no rings.
 */
export function measureRings(
  maps: MeasuredMaps,
  frame: MapFrame,
  orientation: DiscOrientation,
  spec: RingSpec,
): Sector[][] {
  const sectorOf = ringSectors(frame, orientation, spec);
  const { firstAzimuth = 0 } = spec;
  const width = (2 * Math.PI) / spec.sectors;
  const rings = spec.edgesKpc.length - 1;
  const values = measureRegions(maps, sectorOf, rings * spec.sectors, pixelsPerBeam(frame));
  return Array.from({ length: rings }, (_, ring) =>
    Array.from({ length: spec.sectors }, (_, sector) => ({
      ...values[ring * spec.sectors + sector],
      innerKpc: spec.edgesKpc[ring],
      outerKpc: spec.edgesKpc[ring + 1],
      azimuth: firstAzimuth + sector * width,
    })),
  );
}

/** The sector of every pixel, ring * sectors + sector, or -1. Throws InputError as `measureRings` does. */
export function ringSectors(frame: MapFrame, orientation: DiscOrientation, spec: RingSpec): Int32Array {
  refuseEdgeOn(orientation.inclination);
  checkEdges(spec.edgesKpc, 'rings');
  if (spec.edgesKpc[0] < 0) {
    throw new InputError(`the innermost ring begins at ${spec.edgesKpc[0]} kpc; radii are not negative`);
  }
  if (!Number.isInteger(spec.sectors) || spec.sectors < 1) {
    throw new InputError(`a ring of ${spec.sectors} sectors; give a whole number of at least 1`);
  }
  const { radiusKpc, azimuth } = discCoordinates(frame, orientation);
  const width = (2 * Math.PI) / spec.sectors;
  const { firstAzimuth = 0 } = spec;
  return Int32Array.from(radiusKpc, (radius, k) => {
    const ring = findBin(spec.edgesKpc, radius);
    if (ring < 0) return -1;
    const sector = Math.floor((azimuth[k] - firstAzimuth) / width + 0.5 + rounding);
    return ring * spec.sectors + (((sector % spec.sectors) + spec.sectors) % spec.sectors);
  });
}

/** Whether a disc of this inclination (rad) can be deprojected: at most 75 deg from face-on. */
export function measurableAsDisc(inclination: number): boolean {
  const degrees = (inclination * 180) / Math.PI;
  const fromFaceOn = degrees > 90 ? 180 - degrees : degrees;
  return fromFaceOn <= steepestDeg + 1e-9;
}

function refuseEdgeOn(inclination: number): void {
  if (measurableAsDisc(inclination)) return;
  const degrees = (inclination * 180) / Math.PI;
  throw new InputError(
    `rings cannot be measured at an inclination of ${Number(degrees.toPrecision(6))} deg: a disc more than ` +
      `${steepestDeg} deg from face-on cannot be deprojected, its height fills the map; ` +
      'measure strips parallel to the axes instead',
  );
}
