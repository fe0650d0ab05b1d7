import type { RayBackend } from '../ray/job.ts';
import { ringProfile } from '../measure/ring-profile.ts';
import type { Scene } from '../scene/types.ts';
import { depthSearch, fitRotationMeasure } from '../sky/rotation-measure.ts';
import { channelLambda2M2 } from '../sky/wavelength.ts';
import { offsetFromPixel, pixelAreaSr, pixelFromSky } from '../sky/wcs.ts';
import type { ForwardModel } from './forward.ts';
import type { OtherData } from './other-data.ts';
import { makeSkyModel } from './sky-model.ts';
import type { SceneOf } from './sky-model.ts';
import type { DataPlane, DataSet } from './types.ts';

const arcsecPerRadian = 648_000 / Math.PI;

/**
 * A model of everything in a data set: the maps of its planes, then the values of each of its other
 * data, taken from maps of Q and U that the model makes in their channels and with their beam, or
 * from the whole Faraday depth behind the galaxy for sources.
 */
export function makeJointModel(data: DataSet, start: Scene, sceneOf: SceneOf, backend: RayBackend): ForwardModel {
  const others = data.others ?? [];
  if (others.length === 0) return makeSkyModel(data, start, sceneOf, backend);
  // Every other data set that needs maps gets a band of its own.
  const bands = [...data.bands];
  const planes: DataPlane[] = [...data.planes];
  const firstPlane = others.map((other) => {
    if (other.kind === 'sources') return -1;
    const band = bands.push({ name: other.label, channels: other.channels, ...(other.kind !== 'spectrum' && other.beam && { beam: other.beam }) }) - 1;
    const first = planes.length;
    for (const quantity of ['Q', 'U'] as const) {
      other.channels.forEach((_, channel) => planes.push({ quantity, band, channel, values: new Float64Array(0), noise: 1 }));
    }
    return first;
  });
  const wanted: DataSet = { ...data, bands, planes };
  const maps = planes.length > 0 ? makeSkyModel(wanted, start, sceneOf, backend) : async () => [];
  return async (values, signal) => {
    const seen = await maps(values, signal);
    const scene = sceneOf(values);
    const rest = await Promise.all(
      others.map((other, k) => {
        const count = other.channels.length;
        const [Q, U] = [0, count].map((from) => seen.slice(firstPlane[k] + from, firstPlane[k] + from + count));
        if (other.kind === 'sources') return sourceDepths(data, other, scene, backend, signal);
        if (other.kind === 'spectrum') return spectrumOf(data, Q, U);
        return other.kind === 'map' ? mapOf(other, Q, U) : sectorsOf(data, other, Q, U, scene);
      }),
    );
    return [...seen.slice(0, data.planes.length), ...rest];
  };
}

function mapOf(other: OtherData, Q: readonly Float64Array[], U: readonly Float64Array[]): Float64Array {
  if (other.quantity === 'RM') return rotationMeasures(other, Q, U);
  const of = other.quantity === 'P' ? (q: number, u: number): number => Math.hypot(q, u) : (q: number, u: number): number => Math.atan2(u, q) / 2;
  const size = Q[0].length;
  return Float64Array.from({ length: Q.length * size }, (_, k) => of(Q[Math.floor(k / size)][k % size], U[Math.floor(k / size)][k % size]));
}

/** The slope of chi(lambda^2) over the channels, where the data have a value; 0 where the model has no polarization. */
function rotationMeasures({ channels, values, kind }: OtherData, Q: readonly Float64Array[], U: readonly Float64Array[]): Float64Array {
  const search = depthSearch(channels.map(channelLambda2M2));
  const sigma = new Float64Array(channels.length);
  return Float64Array.from(Q[0], (_, pixel) => {
    if (kind === 'map' && !Number.isFinite(values[pixel])) return NaN;
    return fitRotationMeasure(search, Q.map((map) => map[pixel]), U.map((map) => map[pixel]), sigma)?.rm ?? 0;
  });
}

/** |sum of Q + iU| over the sky in each channel, Jy. */
function spectrumOf({ axes }: DataSet, Q: readonly Float64Array[], U: readonly Float64Array[]): Float64Array {
  const area = pixelAreaSr(axes.wcs);
  const sum = (map: Float64Array): number => map.reduce((total, value) => total + value, 0);
  return Float64Array.from(Q, (map, k) => area * Math.hypot(sum(map), sum(U[k])));
}

function sectorsOf({ axes }: DataSet, other: OtherData, Q: readonly Float64Array[], U: readonly Float64Array[], scene: Scene): Float64Array {
  const { inclination, positionAngle, distanceKpc, centre } = scene.galaxy;
  const rm = other.quantity === 'RM' ? rotationMeasures(other, Q, U) : undefined;
  const { sectors } = ringProfile(
    { Q: Q[0], U: U[0], sigmaQU: 0, ...(rm && { rm, rmError: new Float64Array(rm.length) }) },
    { nx: axes.nx, ny: axes.ny, wcs: axes.wcs, ...(other.beam && { beam: other.beam }) },
    { inclination, positionAngle, distanceKpc, centre: centre ?? { raDeg: 0, decDeg: 0 } },
    other.ring!,
  );
  return Float64Array.from(sectors, ({ P, chi, rm: depth }) => (other.quantity === 'P' ? P.value : other.quantity === 'chi' ? chi : (depth?.value ?? NaN)));
}

/** Total Faraday depth through the galaxy at each source, with the foreground's constant and gradient. */
async function sourceDepths({ axes }: DataSet, { places = [] }: OtherData, scene: Scene, backend: RayBackend, signal?: AbortSignal): Promise<Float64Array> {
  const { distanceKpc, centre } = scene.galaxy;
  const offset = offsetFromPixel(axes.wcs, centre ?? { raDeg: 0, decDeg: 0 });
  const offsets = places.map(({ raDeg, decDeg }) => {
    const { pixelX, pixelY } = pixelFromSky(axes.wcs, raDeg, decDeg);
    return offset(pixelX, pixelY);
  });
  const bundle = {
    northKpc: Float64Array.from(offsets, ({ north }) => north * distanceKpc),
    eastKpc: Float64Array.from(offsets, ({ east }) => east * distanceKpc),
  };
  const { faradayDepth } = await backend({ scene, spectrum: [{ frequencyHz: 1.4e9, centreHz: 1.4e9 }], bundle, origins: false }, { signal });
  const { foregroundDepth, foregroundGradient: gradient } = scene.observation;
  return faradayDepth.map((depth, k) => {
    const { north, east } = offsets[k];
    const along = gradient ? (north * Math.cos(gradient.angle) + east * Math.sin(gradient.angle)) * arcsecPerRadian : 0;
    return depth + foregroundDepth + (gradient ? gradient.radM2PerArcsec * along : 0);
  });
}
