import { makeScratchCube, type ScratchCube } from '../files/scratch-cube.ts';
import type { Beam } from '../scene/types.ts';
import { beamChange } from '../sky/common-beam.ts';
import { cubeInMemory, type CubeSource } from '../sky/cube-source.ts';
import type { BrightnessUnit } from '../sky/types.ts';
import type { Plane } from './measure-input.ts';

/** A cube that has to be smoothed, plane by plane, before it can be used. */
export interface Smoothing {
  readonly planes: number;
  /** Smooths one channel, and the next with it where there is one. */
  runPair(channel: number): void;
  close(): void;
}

/**
 * A plane with the beam that all are brought to. Its noise is changed at once; its cube is ready when the
 * smoothing that this adds to `smoothings` has run over all channels: in memory, or in a scratch file
 * where it is large.
 */
export function smoothed(plane: Plane, target: Beam | undefined, unit: BrightnessUnit, isLarge: boolean, smoothings: Smoothing[], notes: string[]): Plane {
  if (!plane.beam || !target) return plane;
  const { wcs, nx, ny } = plane.image;
  const change = beamChange({ wcs, nx, ny }, plane.beam, target, unit);
  if (!change) return { ...plane, beam: target };
  const { noiseFactor } = change;
  if (noiseFactor !== 1) notes.push(`${plane.file}: smoothed to ${Number(target.majorArcsec.toPrecision(4))} x ${Number(target.minorArcsec.toPrecision(4))} arcsec; its noise becomes ${Number(noiseFactor.toPrecision(3))} times as large`);
  const channels = plane.channels.length;
  let made: (CubeSource & Pick<ScratchCube, 'write' | 'close'>) | undefined;
  const cube = (): NonNullable<typeof made> => (made ??= isLarge ? makeScratchCube(nx, ny, channels) : cubeToFill(nx, ny, channels));
  smoothings.push({
    planes: channels,
    runPair: (channel) => {
      const second = channel + 1 < channels ? plane.cube.plane(channel + 1) : undefined;
      change.planes(plane.cube.plane(channel), second).forEach((values, k) => cube().write(channel + k, values));
    },
    close: () => made?.close(),
  });
  return { ...plane, cube: { rows: (from, to) => cube().rows(from, to), plane: (channel) => cube().plane(channel) }, noise: plane.noise.map((rms) => rms * noiseFactor), beam: target };
}

/** Runs all of them. */
export async function runSmoothings(smoothings: readonly Smoothing[], watch: { readonly onProgress: (done: number, total: number) => void; readonly pause: () => Promise<void>; readonly signal: AbortSignal }): Promise<void> {
  const total = smoothings.reduce((sum, { planes }) => sum + planes, 0);
  let done = 0;
  for (const smoothing of smoothings) {
    for (let channel = 0; channel < smoothing.planes; channel += 2) {
      watch.signal.throwIfAborted();
      smoothing.runPair(channel);
      watch.onProgress(Math.min(done + channel + 2, done + smoothing.planes), total);
      await watch.pause();
    }
    done += smoothing.planes;
  }
}

function cubeToFill(nx: number, ny: number, channels: number): CubeSource & Pick<ScratchCube, 'write' | 'close'> {
  const values = new Float64Array(channels * nx * ny);
  return { ...cubeInMemory(values, nx, ny), write: (channel, plane) => values.set(plane, channel * nx * ny), close: () => undefined };
}
