import { frameFromGrid } from '../measure/disc.ts';
import { defaultRing, ringProfile, type Ring } from '../measure/ring-profile.ts';
import type { Scene } from '../scene/types.ts';
import type { CentreMaps } from '../sky/band-centre.ts';
import type { BrightnessUnit, SkyGrid } from '../sky/types.ts';
import type { RotationMeasureMaps } from '../sky/rotation-measure-map.ts';
import { InputError } from '../units/input-error.ts';
import type { Overview, OverviewRow } from './overview.ts';
import { frequencyLabel, polarizationView, profileOfP, profileOfRm, rotationMeasureView, type ViewFrame } from './sky-views.ts';

/** What an overview shows: each band at its centre. */
export interface OverviewSky {
  readonly grid: SkyGrid;
  readonly bands: readonly { readonly unit: BrightnessUnit; readonly maps: CentreMaps }[];
}

/** The overview of one run of maps: P of every band with field orientation, RM, and both round a ring. */
export function skyOverview(scene: Scene, { grid, bands }: OverviewSky, rm: RotationMeasureMaps | undefined): Overview {
  const { inclination, positionAngle, distanceKpc, volume } = scene.galaxy;
  const ring = defaultRing(volume.radiusKpc);
  const frame = frameFromGrid(grid, scene.observation.beam);
  const orientation = { inclination, positionAngle, distanceKpc };
  const view: ViewFrame = { frame, distanceKpc, rings: [drawnRing(ring, scene)] };
  const [{ maps: { I, Q, U, noise } }] = bands;
  const profileOf = (maps: { Q: Float64Array; U: Float64Array; noise: number }): ReturnType<typeof ringProfile> | undefined =>
    refusedAsUndefined(() =>
      ringProfile({ Q: maps.Q, U: maps.U, sigmaQU: maps.noise, ...(rm && { rm: rm.rm, rmError: rm.rmError }) }, frame, orientation, ring),
    );
  const rows = bands.map(({ unit, maps }): OverviewRow => {
    const profile = profileOf(maps);
    const label = `P, ${frequencyLabel(maps.frequencyHz)}`;
    return {
      label,
      maps: [polarizationView(maps, unit, view, label)],
      ...(profile && { profile: { quantity: 'P', unit: unit, curves: [profileOfP(profile, 'model')] } }),
    };
  });
  if (rm) {
    const profile = profileOf({ Q, U, noise });
    rows.push({
      label: 'RM, all bands',
      maps: [rotationMeasureView(rm, view, 'RM')],
      ...(profile && { profile: { quantity: 'RM', unit: 'rad/m^2', curves: [profileOfRm(profile, 'model')] } }),
    });
  }
  const degrees = (angle: number): string => ((angle * 180) / Math.PI).toFixed(0);
  return {
    title: scene.title,
    subtitle: `inclination ${degrees(inclination)}°, position angle ${degrees(positionAngle)}°, ${I ? 'Stokes I, Q, U' : 'Stokes Q, U'} by ray transfer to ${scene.numerics.tolerance}`,
    columns: ['model'],
    rows,
    notes: [
      'Lines show the orientation of the magnetic field as it appears (angle of the electric vector + 90°), their length P.',
      `Profiles go round the ring from ${ring.innerKpc} to ${ring.outerKpc} kpc in the disc, drawn as an ellipse at its middle.`,
    ],
  };
}

/** A ring of the disc as map panels draw it: the circle through its middle. */
export function drawnRing({ innerKpc, outerKpc }: Ring, { galaxy }: Pick<Scene, 'galaxy'>): NonNullable<ViewFrame['rings']>[number] {
  return { radiusKpc: (innerKpc + outerKpc) / 2, inclination: galaxy.inclination, positionAngle: galaxy.positionAngle };
}

/** Discs seen too nearly edge-on have no rings: their profile is left out, not invented. */
function refusedAsUndefined<T>(measure: () => T): T | undefined {
  try {
    return measure();
  } catch (error) {
    if (error instanceof InputError) return undefined;
    throw error;
  }
}
