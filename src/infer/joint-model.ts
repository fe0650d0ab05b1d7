import type { RayBackend } from '../ray/job.ts';
import { ringProfile } from '../measure/ring-profile.ts';
import type { Scene } from '../scene/types.ts';
import { depthSearch, fitRotationMeasure } from '../sky/rotation-measure.ts';
import { channelLambda2M2 } from '../sky/wavelength.ts';
import { offsetFromPixel, pixelAreaSr, pixelFromSky } from '../sky/wcs.ts';
import type { RayBundle } from '../ray/types.ts';
import type { ForwardModel, ModelSlopes } from './forward.ts';
import { sceneSlopes, type SceneSlopes } from './scene-slopes.ts';
import { combineDepths } from './sky-slopes.ts';
import type { OtherData } from './other-data.ts';
import { makeSkyModel } from './sky-model.ts';
import type { SceneOf } from './scene-of.ts';
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
  const maps: ForwardModel = planes.length > 0 ? makeSkyModel(wanted, start, sceneOf, backend) : async () => [];
  const reduce = (other: OtherData, k: number, seen: readonly Float64Array[], scene: Scene): Float64Array => {
    const count = other.channels.length;
    const [Q, U] = [0, count].map((from) => seen.slice(firstPlane[k] + from, firstPlane[k] + from + count));
    if (other.kind === 'spectrum') return spectrumOf(data, Q, U);
    return other.kind === 'map' ? mapOf(other, Q, U) : sectorsOf(data, other, Q, U, scene);
  };
  const model = async (values: Float64Array, signal?: AbortSignal): Promise<readonly Float64Array[]> => {
    const seen = await maps(values, signal);
    const scene = sceneOf(values);
    const rest = await Promise.all(
      others.map((other, k) => (other.kind === 'sources' ? sourceDepths(data, other, scene, backend, signal) : reduce(other, k, seen, scene))),
    );
    return [...seen.slice(0, data.planes.length), ...rest];
  };
  const slopes = async (values: Float64Array, signal?: AbortSignal): Promise<ModelSlopes | undefined> => {
    const known = await maps.slopes?.(values, signal);
    // Without maps, the rays of a few sources are as cheap to follow again.
    if (!known) return undefined;
    const changes = sceneSlopes(sceneOf, values, values.length);
    const sources = await Promise.all(others.map((other) => (other.kind === 'sources' ? sourceSlopes(data, other, changes, backend, signal) : undefined)));
    const reduced = others.map((other, k) => sources[k]?.depths ?? reduce(other, k, known.maps, changes.scene));
    const columns = known.columns.map((column, j) => {
      const change = changes.columns[j];
      if (!column || !change) return undefined;
      const rest = others.map((other, k) => sources[k]?.columns[j] ?? differenceOf(other, change.width, (share) => {
        const there = known.maps.map((map, plane) => map.map((value, pixel) => value + share * change.width * column[plane][pixel]));
        return reduce(other, k, there, share > 0 ? change.ahead : change.behind);
      }));
      return [...column.slice(0, data.planes.length), ...rest];
    });
    return { maps: [...known.maps.slice(0, data.planes.length), ...reduced], columns };
  };
  return Object.assign(model, { slopes });
}

/** Derivative of what is made of maps, by a difference along theirs: no rays are followed, and little is lost in so small a step. */
function differenceOf({ quantity }: OtherData, width: number, at: (share: number) => Float64Array): Float64Array {
  const [ahead, behind] = [at(0.5), at(-0.5)];
  // Angles are known modulo a half turn.
  const across = (change: number): number => (quantity === 'chi' ? change - Math.PI * Math.round(change / Math.PI) : change);
  return ahead.map((value, k) => across(value - behind[k]) / width);
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

/** Rays to the sources behind a galaxy, with their offsets on the sky, rad. */
function raysToSources({ axes }: DataSet, { places = [] }: OtherData, { galaxy }: Scene): { readonly bundle: RayBundle; readonly offsets: readonly { readonly north: number; readonly east: number }[] } {
  const offset = offsetFromPixel(axes.wcs, galaxy.centre ?? { raDeg: 0, decDeg: 0 });
  const offsets = places.map(({ raDeg, decDeg }) => {
    const { pixelX, pixelY } = pixelFromSky(axes.wcs, raDeg, decDeg);
    return offset(pixelX, pixelY);
  });
  const bundle = {
    northKpc: Float64Array.from(offsets, ({ north }) => north * galaxy.distanceKpc),
    eastKpc: Float64Array.from(offsets, ({ east }) => east * galaxy.distanceKpc),
  };
  return { bundle, offsets };
}

const sourceSpectrum = [{ frequencyHz: 1.4e9, centreHz: 1.4e9 }];

/** Total Faraday depth through the galaxy at each source, with the foreground's constant and gradient. */
async function sourceDepths(data: DataSet, other: OtherData, scene: Scene, backend: RayBackend, signal?: AbortSignal): Promise<Float64Array> {
  const { bundle, offsets } = raysToSources(data, other, scene);
  const { faradayDepth } = await backend({ scene, spectrum: sourceSpectrum, bundle, origins: false }, { signal });
  return faradayDepth.map((depth, k) => depth + foregroundAt(scene, offsets[k]));
}

/** The same with its derivative by each free parameter that rays have one by. */
async function sourceSlopes(data: DataSet, other: OtherData, { scene, paths, columns }: SceneSlopes, backend: RayBackend, signal?: AbortSignal): Promise<{ readonly depths: Float64Array; readonly columns: readonly (Float64Array | undefined)[] }> {
  const { bundle, offsets } = raysToSources(data, other, scene);
  const { faradayDepth, tangents } = await backend({ scene, spectrum: sourceSpectrum, bundle, origins: false, tangents: paths }, { signal });
  return {
    depths: faradayDepth.map((depth, k) => depth + foregroundAt(scene, offsets[k])),
    columns: columns.map((column) => column && combineDepths(tangents, column.rates, offsets.length).map(
      (slope, k) => slope + (foregroundAt(column.ahead, offsets[k]) - foregroundAt(column.behind, offsets[k])) / column.width,
    )),
  };
}

function foregroundAt({ observation }: Scene, { north, east }: { readonly north: number; readonly east: number }): number {
  const { foregroundDepth, foregroundGradient: gradient } = observation;
  const along = gradient ? (north * Math.cos(gradient.angle) + east * Math.sin(gradient.angle)) * arcsecPerRadian : 0;
  return foregroundDepth + (gradient ? gradient.radM2PerArcsec * along : 0);
}
