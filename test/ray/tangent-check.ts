import { expect } from 'vitest';
import { scenePath } from '../../src/scene/paths.ts';
import type { Scene } from '../../src/scene/types.ts';
import type { SpectralPoint } from '../../src/ray/integrand.ts';
import { findMapScale, makeRayEngine, traceRays, type BackEnd } from '../../src/ray/trace.ts';
import type { RayBundle, RayResult } from '../../src/ray/types.ts';
import { frequencies } from './scenes.ts';

export type Maps = Readonly<Record<'I' | 'Q' | 'U' | 'faradayDepth', Float64Array>>;

/** Values and derivatives of a scene's rays by some paths. */
export function followTangents(scene: Scene, spectrum: readonly SpectralPoint[], bundle: RayBundle, paths: readonly string[], backEnd?: BackEnd): RayResult {
  const engine = makeRayEngine(scene, spectrum, backEnd, paths);
  return traceRays(engine, scene, bundle, findMapScale(engine, scene, bundle));
}

/** The derivatives by one of the paths. */
export function slopesBy({ tangents, faradayDepth, I }: RayResult, p: number): Maps {
  if (!tangents) throw new Error('no derivatives were asked for');
  const part = (all: Float64Array, size: number): Float64Array => all.subarray(p * size, (p + 1) * size);
  return { I: part(tangents.I, I.length), Q: part(tangents.Q, I.length), U: part(tangents.U, I.length), faradayDepth: part(tangents.faradayDepth, faradayDepth.length) };
}

/**
 * ∂(maps)/∂(number at a path) by central differences with steps h, h/2 and h/4, extrapolated twice
 * (Richardson 1911): error of order h^6. Rays keep their place on the sky: offsets grow with the distance.
 */
export function differenceMaps(scene: Scene, spectrum: readonly SpectralPoint[], bundle: RayBundle, path: string, step: number): Maps {
  const target = scenePath(scene, path);
  const at = (value: number): RayResult => {
    const changed = target.set(scene, value);
    const engine = makeRayEngine(changed, spectrum);
    const stretch = changed.galaxy.distanceKpc / scene.galaxy.distanceKpc;
    const rays = { northKpc: bundle.northKpc.map((v) => v * stretch), eastKpc: bundle.eastKpc.map((v) => v * stretch) };
    return traceRays(engine, changed, rays, findMapScale(engine, changed, rays));
  };
  const pairs = [step, step / 2, step / 4].map((h) => ({ h, up: at(target.get() + h), down: at(target.get() - h) }));
  const extrapolate = (name: keyof Maps): Float64Array =>
    pairs[0].up[name].map((_, k) => {
      const [a, b, c] = pairs.map(({ h, up, down }) => (up[name][k] - down[name][k]) / (2 * h));
      const [first, second] = [(4 * b - a) / 3, (4 * c - b) / 3];
      return (16 * second - first) / 15;
    });
  return { I: extrapolate('I'), Q: extrapolate('Q'), U: extrapolate('U'), faradayDepth: extrapolate('faradayDepth') };
}

/**
 * Largest difference of two sets of derivatives by a parameter of that size, over the largest of the
 * second; of Q and U together. That scale is at least 1e-3 of the maps over the size.
 */
export function worstDifference(a: Maps, b: Maps, values: Maps, size: number): number {
  const largest = (maps: readonly Float64Array[]): number => maps.reduce((most, map) => map.reduce((found, value) => Math.max(found, Math.abs(value)), most), 0);
  const groups: (keyof Maps)[][] = [['I'], ['Q', 'U'], ['faradayDepth']];
  return Math.max(...groups.map((names) => {
    const scale = Math.max(largest(names.map((name) => b[name])), (1e-3 * largest(names.map((name) => values[name]))) / size, 1e-300);
    const off = largest(names.map((name) => a[name].map((value, k) => value - b[name][k])));
    return off / scale;
  }));
}

// Central differences of tight maps (Richardson 1911) keep about 1e-9 of the largest derivative, near singular
// centres 1e-7.
const wanted = 1e-6;
const checkRays = { northKpc: Float64Array.of(1, 3, -2.2), eastKpc: Float64Array.of(0.7, -1, 3.1) };
const checkSpectrum = frequencies(0.7e9, 2.3e9);

/** Checks derivatives of a few rays by some paths: one back end against the other, and against central differences. */
export function checkAgainstDifferences(scene: Scene, paths: readonly string[], relativeStep = 4e-3): void {
  const javascript = followTangents(scene, checkSpectrum, checkRays, paths, 'javascript');
  const wasm = followTangents(scene, checkSpectrum, checkRays, paths, 'wasm');
  paths.forEach((path, p) => {
    const exact = slopesBy(javascript, p);
    expect(worstDifference(slopesBy(wasm, p), exact, javascript, 1), `${path} in WebAssembly`).toBeLessThan(1e-12);
    const size = Math.abs(scenePath(scene, path).get()) || 0.1;
    const differences = differenceMaps(scene, checkSpectrum, checkRays, path, relativeStep * size);
    expect(worstDifference(exact, differences, javascript, size), path).toBeLessThan(wanted);
  });
}
