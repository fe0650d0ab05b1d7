import { bandViews, rotationMeasuresOf, type BandView } from '../infer/data-views.ts';
import type { DataSet } from '../infer/types.ts';
import type { MapFrame } from '../measure/disc.ts';
import { ringProfile, type Ring, type RingProfile } from '../measure/ring-profile.ts';
import type { Scene } from '../scene/types.ts';
import { arcsec } from '../sky/grid.ts';
import type { RotationMeasureMaps } from '../sky/rotation-measure-map.ts';
import type { SkyGrid } from '../sky/types.ts';
import { pixelAreaSr } from '../sky/wcs.ts';
import { InputError } from '../units/input-error.ts';
import type { Overview, OverviewRow } from './overview.ts';
import { drawnRing } from './sky-overview.ts';
import { frequencyLabel, polarizationView, profileOfP, profileOfRm, rotationMeasureView, type ViewFrame } from './sky-views.ts';

/** One band of a model or of the data: its maps and its profile round the ring, where there can be one. */
export interface BandMeasured extends BandView {
  readonly profile?: RingProfile;
}

/** A model or the data, measured alike. */
export interface Measured {
  readonly bands: readonly BandMeasured[];
  readonly rm?: RotationMeasureMaps;
  /** Of RM; its P is the first band's. */
  readonly rmProfile?: RingProfile;
}

/** Measures data (no `model`) or a model's maps on the data's grid, with the scene's orientation. */
export function measureOnData(data: DataSet, scene: Pick<Scene, 'galaxy'>, ring: Ring, model?: readonly Float64Array[]): Measured {
  const views = bandViews(data, dataGrid(data, scene), model);
  const rm = rotationMeasuresOf(views);
  const { inclination, positionAngle, distanceKpc, centre } = scene.galaxy;
  const orientation = { inclination, positionAngle, distanceKpc, centre: centre ?? { raDeg: 0, decDeg: 0 } };
  const measure = (view: BandView): RingProfile | undefined => {
    const { Q, U, noise } = view.centre;
    try {
      return ringProfile({ Q, U, sigmaQU: noise, ...(rm && { rm: rm.rm, rmError: rm.rmError }) }, frameOf(data, view), orientation, ring);
    } catch (error) {
      if (error instanceof InputError) return undefined;
      throw error;
    }
  };
  const bands = views.map((view): BandMeasured => ({ ...view, profile: measure(view) }));
  return { bands, rm, rmProfile: rm ? bands[0]?.profile : undefined };
}

/** The overview of one hypothesis: observation and model side by side, and both round the ring. */
export function comparisonOverview(title: string, subtitle: string, scene: Scene, data: DataSet, observed: Measured, model: Measured, ring: Ring): Overview {
  const rows = model.bands.map((band, k): OverviewRow => {
    const seen = observed.bands[k];
    const view = viewFrame(data, band, scene, ring);
    const label = `P, ${frequencyLabel(band.centre.frequencyHz)}`;
    return {
      label,
      maps: [polarizationView(seen.centre, data.unit, view, label), polarizationView(band.centre, data.unit, view, label)],
      ...(band.profile && {
        profile: {
          quantity: 'P',
          unit: data.unit,
          curves: [profileOfP(band.profile, 'model')],
          ...(seen.profile && { data: [profileOfP(seen.profile, 'observed')] }),
        },
      }),
    };
  });
  if (model.rm && observed.rm) {
    const view = viewFrame(data, model.bands[0], scene, ring);
    rows.push({
      label: 'RM, all bands',
      maps: [rotationMeasureView(observed.rm, view, 'RM'), rotationMeasureView(model.rm, view, 'RM')],
      ...(model.rmProfile && {
        profile: {
          quantity: 'RM',
          unit: 'rad/m^2',
          curves: [profileOfRm(model.rmProfile, 'model')],
          ...(observed.rmProfile && { data: [profileOfRm(observed.rmProfile, 'observed')] }),
        },
      }),
    });
  }
  return {
    title,
    subtitle,
    columns: ['observation', 'model'],
    rows,
    notes: comparisonNotes(ring),
  };
}

/** What lines, rings and hatching mean. */
export function comparisonNotes(ring: Ring): readonly string[] {
  return [
    'Lines show the orientation of the magnetic field as it appears (angle of the electric vector + 90°), their length P without noise bias.',
    `Profiles go round the ring from ${ring.innerKpc} to ${ring.outerKpc} kpc in the disc, drawn as an ellipse at its middle; hatched: blank.`,
  ];
}

/** The frame in which a band's panels are drawn. */
export function viewFrame(data: DataSet, band: BandView, scene: Pick<Scene, 'galaxy'>, ring: Ring): ViewFrame {
  return { frame: frameOf(data, band), distanceKpc: scene.galaxy.distanceKpc, rings: [drawnRing(ring, scene)] };
}

function frameOf({ axes }: DataSet, { cube }: BandView): MapFrame {
  return { nx: axes.nx, ny: axes.ny, wcs: axes.wcs, ...(cube.beam && { beam: cube.beam }) };
}

/** The data's pixels as a grid, for what needs sizes only. */
function dataGrid({ axes }: DataSet, { galaxy }: Pick<Scene, 'galaxy'>): SkyGrid {
  const pixelRad = Math.sqrt(pixelAreaSr(axes.wcs));
  const { raDeg, decDeg, crpixX, crpixY } = axes.wcs;
  return { nx: axes.nx, ny: axes.ny, pixelArcsec: pixelRad / arcsec, pixelKpc: pixelRad * galaxy.distanceKpc, raDeg, decDeg, crpixX, crpixY };
}
