import type { Beam } from '../scene/types.ts';
import { beamSolidAngleSr } from '../sky/beam.ts';
import { offsetsKpc, wcsFromGrid } from '../sky/grid.ts';
import type { SkyGrid } from '../sky/types.ts';
import type { CelestialWcs } from '../sky/wcs-types.ts';
import { pixelAreaSr } from '../sky/wcs.ts';
import type { SkyPoint } from '../sky/wcs.ts';

/** Where the pixels [row * nx + column] of a map lie, and the beam it was seen with. */
export interface MapFrame {
  readonly nx: number;
  readonly ny: number;
  readonly wcs: CelestialWcs;
  readonly beam?: Beam;
}

/** How a disc lies on the sky (design conventions: position angle of the receding half, 0 to 180 deg inclination). */
export interface DiscOrientation {
  /** rad */
  readonly inclination: number;
  /** rad, north through east. */
  readonly positionAngle: number;
  readonly distanceKpc: number;
  /** The map's reference point where left out. */
  readonly centre?: SkyPoint;
}

/** The frame of a model's or scene's grid. */
export function frameFromGrid(grid: SkyGrid, beam?: Beam): MapFrame {
  return { nx: grid.nx, ny: grid.ny, wcs: wcsFromGrid(grid), beam };
}

/**
 * Offsets of the pixel centres along the major axis (positive on the receding half) and across it
 * (positive at position angle + 90 deg), kpc.
 */
export function axisOffsetsKpc(
  frame: MapFrame,
  { positionAngle, distanceKpc, centre }: DiscOrientation,
): { alongMajor: Float64Array; alongMinor: Float64Array } {
  const { northKpc, eastKpc } = offsetsKpc(frame.wcs, frame.nx, frame.ny, distanceKpc, centre);
  const [cos, sin] = [Math.cos(positionAngle), Math.sin(positionAngle)];
  return {
    alongMajor: northKpc.map((north, k) => north * cos + eastKpc[k] * sin),
    alongMinor: northKpc.map((north, k) => eastKpc[k] * cos - north * sin),
  };
}

/**
 * Radius (kpc) and galaxy azimuth (rad, in (-pi, pi], 0 on the receding half, growing with the
 * rotation) of the pixel centres in the mid-plane z = 0 of a thin disc.
 */
export function discCoordinates(
  frame: MapFrame,
  orientation: DiscOrientation,
): { radiusKpc: Float64Array; azimuth: Float64Array } {
  const { alongMajor, alongMinor } = axisOffsetsKpc(frame, orientation);
  const y = alongMinor.map((offset) => offset / Math.cos(orientation.inclination));
  return {
    radiusKpc: alongMajor.map((x, k) => Math.hypot(x, y[k])),
    azimuth: alongMajor.map((x, k) => Math.atan2(y[k], x)),
  };
}

/** Pixels per beam solid angle, at least 1; 1 without a beam: how many pixels share their noise. */
export function pixelsPerBeam({ wcs, beam }: MapFrame): number {
  return beam ? Math.max(1, beamSolidAngleSr(beam) / pixelAreaSr(wcs)) : 1;
}
