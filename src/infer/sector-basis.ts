import type { Scene } from '../scene/types.ts';
import { offsetFromPixel } from '../sky/wcs.ts';
import type { Likelihood, ResidualPlace } from './likelihood.ts';
import type { DataSet } from './types.ts';

/** How finely a galaxy is cut into sectors, plane by plane. */
export interface SectorGrid {
  /** Of equal width out to the volume's radius; the last one takes all beyond. */
  readonly rings: number;
  readonly sectors: number;
}

/** Seen edge on a disc has no sectors; they are drawn on one inclined so that its axes are as 4 to 1. */
const leastAxisRatio = 0.25;

/**
 * A likelihood of sums over sectors of a galaxy in place of single residuals: z_s = sum of the whitened
 * residuals in a sector of one plane, over the root of their number. For noise alone these are
 * independent unit Gaussians, as the residuals are; what they lose is structure within a sector. Residuals
 * of other data follow one by one. All hypotheses of a study must be compared in the same sectors, those of `galaxy`.
 */
export function inSectors(likelihood: Likelihood, { axes }: Pick<DataSet, 'axes'>, galaxy: Scene['galaxy'], grid: SectorGrid): Likelihood {
  const { places } = likelihood;
  const sectorOf = sectorFinder(axes, galaxy, grid);
  const found = new Map<string, { readonly members: number[]; readonly slow: number; readonly fast: number }>();
  places.forEach((place, k) => {
    const { ring, sector } = sectorOf(place);
    const key = `${place.plane} ${ring} ${sector}`;
    const part = found.get(key) ?? { members: [], slow: ring, fast: sector };
    part.members.push(k);
    found.set(key, part);
  });
  const parts = [...found.values()];
  const rest = likelihood.residualCount - places.length;
  return {
    count: parts.length + rest,
    residualCount: parts.length + rest,
    // Fewer unit Gaussians; the units of the maps, the same for all hypotheses, stay.
    logNormalisation: likelihood.logNormalisation + ((places.length - parts.length) / 2) * Math.log(2 * Math.PI),
    places: parts.map(({ members, slow, fast }): ResidualPlace => {
      const mean = (pick: (place: ResidualPlace) => number): number => members.reduce((sum, k) => sum + pick(places[k]), 0) / members.length;
      return { plane: places[members[0]].plane, pixelX: mean((one) => one.pixelX), pixelY: mean((one) => one.pixelY), slow, fast };
    }),
    residuals: (model) => {
      const all = likelihood.residuals(model);
      const sums = Float64Array.from(parts, ({ members }) => members.reduce((sum, k) => sum + all[k], 0) / Math.sqrt(members.length));
      const joined = new Float64Array(sums.length + all.length - places.length);
      joined.set(sums);
      joined.set(all.subarray(places.length), sums.length);
      return joined;
    },
  };
}

function sectorFinder(axes: DataSet['axes'], { centre, distanceKpc, inclination, positionAngle, volume }: Scene['galaxy'], { rings, sectors }: SectorGrid): (place: ResidualPlace) => { readonly ring: number; readonly sector: number } {
  const offset = offsetFromPixel(axes.wcs, centre ?? { raDeg: 0, decDeg: 0 });
  const ratio = Math.max(leastAxisRatio, Math.abs(Math.cos(inclination)));
  return ({ pixelX, pixelY }) => {
    const { north, east } = offset(pixelX, pixelY);
    const x = distanceKpc * (north * Math.cos(positionAngle) + east * Math.sin(positionAngle));
    const y = (distanceKpc * (east * Math.cos(positionAngle) - north * Math.sin(positionAngle))) / ratio;
    const turn = Math.atan2(y, x) / (2 * Math.PI);
    return {
      ring: Math.min(rings - 1, Math.floor((rings * Math.hypot(x, y)) / volume.radiusKpc)),
      sector: (Math.round(turn * sectors) + sectors) % sectors,
    };
  };
}
