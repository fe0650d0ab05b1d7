import { readFileSync } from 'node:fs';
import { fileURLToPath } from 'node:url';
import { frameFromGrid } from '../../src/measure/disc.ts';
import { fitHarmonics, type HarmonicFit } from '../../src/measure/harmonics.ts';
import { measureRings } from '../../src/measure/rings.ts';
import { localBackend } from '../../src/ray/job.ts';
import type { Override } from '../../src/scene/overrides.ts';
import { parseScene } from '../../src/scene/parse-scene.ts';
import type { Scene } from '../../src/scene/types.ts';
import { observe } from '../../src/sky/observe.ts';
import { turnByForeground } from '../../src/sky/foreground.ts';
import { depthSearch, fitRotationMeasure } from '../../src/sky/rotation-measure.ts';
import { lambda2M2 } from '../../src/sky/wavelength.ts';

/** A reference scene with values changed. */
export function referenceScene(name: string, changes: Readonly<Record<string, string>> = {}): Scene {
  const file = fileURLToPath(new URL(`../reference/${name}.yaml`, import.meta.url));
  return parseScene(readFileSync(file, 'utf8'), file, Object.entries(changes).map(([path, value]): Override => ({ path, value, flag: `--set ${path}=${value}` })));
}

/** Q and U, [frequency][azimuth], of rays through a ring of the mid-plane, no beam; the foreground included. */
export async function ringLight(scene: Scene, radiusKpc: number, azimuths: readonly number[], frequenciesHz: readonly number[]): Promise<{ Q: Float64Array; U: Float64Array }> {
  const { inclination, positionAngle } = scene.galaxy;
  const [cos, sin] = [Math.cos(positionAngle), Math.sin(positionAngle)];
  const along = azimuths.map((phi) => radiusKpc * Math.cos(phi));
  const across = azimuths.map((phi) => radiusKpc * Math.sin(phi) * Math.cos(inclination));
  const bundle = {
    northKpc: Float64Array.from(along, (x, k) => x * cos - across[k] * sin),
    eastKpc: Float64Array.from(along, (x, k) => x * sin + across[k] * cos),
  };
  const spectrum = frequenciesHz.map((frequencyHz) => ({ frequencyHz, centreHz: frequencyHz }));
  const { Q, U } = await localBackend()({ scene, spectrum, bundle });
  turnByForeground(Q, U, frequenciesHz, scene.observation.foregroundDepth);
  return { Q, U };
}

export const ringAzimuths = Array.from({ length: 36 }, (_, k) => (k * 2 * Math.PI) / 36);

/** Harmonics of |P| on a ring at one frequency, no beam. */
export async function ringHarmonicsP(scene: Scene, radiusKpc: number, frequencyHz: number): Promise<HarmonicFit> {
  const { Q, U } = await ringLight(scene, radiusKpc, ringAzimuths, [frequencyHz]);
  return fitHarmonics(ringAzimuths, Q.map((q, k) => Math.hypot(q, U[k])));
}

/** Harmonics of the RM on a ring from three short wavelengths, no beam. */
export async function ringHarmonicsRm(scene: Scene, radiusKpc: number): Promise<HarmonicFit> {
  const frequencies = [6e9, 7e9, 8e9];
  const { Q, U } = await ringLight(scene, radiusKpc, ringAzimuths, frequencies);
  const search = depthSearch(frequencies.map(lambda2M2), 1000);
  const count = ringAzimuths.length;
  const rm = ringAzimuths.map((_, k) => {
    const pick = (planes: Float64Array): number[] => frequencies.map((__, f) => planes[f * count + k]);
    return fitRotationMeasure(search, pick(Q), pick(U), [0, 0, 0])?.rm ?? NaN;
  });
  return fitHarmonics(ringAzimuths, rm);
}

/** Harmonics of |P| in the sectors of a ring 1 kpc wide of the map seen with a round beam of so many kpc. */
export async function beamHarmonicsP(scene: Scene, radiusKpc: number, beamKpc: number, frequencyHz: number): Promise<HarmonicFit> {
  const arcsecPerKpc = 206264.80624709636 / scene.galaxy.distanceKpc;
  const pixels = 57;
  const pixelKpc = 0.25;
  const fwhm = beamKpc * arcsecPerKpc;
  const seen: Scene = {
    ...scene,
    observation: {
      ...scene.observation,
      image: { nx: pixels, ny: pixels, pixelArcsec: pixelKpc * arcsecPerKpc },
      bands: [{ name: 'one', channels: [{ frequencyHz, widthHz: 0 }], centreHz: frequencyHz }],
      beam: { majorArcsec: fwhm, minorArcsec: fwhm, angle: 0 },
    },
  };
  const { cubes, grid } = await observe(seen, localBackend());
  const [{ Q, U, beam }] = cubes;
  const spec = { edgesKpc: [radiusKpc - 0.5, radiusKpc + 0.5], sectors: 24 };
  const [sectors] = measureRings({ Q, U, sigmaQU: 0 }, frameFromGrid(grid, beam), scene.galaxy, spec);
  return fitHarmonics(sectors.map(({ azimuth }) => azimuth), sectors.map(({ P }) => P.value));
}
