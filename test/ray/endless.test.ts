import { expect, test } from 'vitest';
import { joinTiles, sampleBudget } from '../../src/ray/job.ts';
import { findMapScale, makeRayEngine, traceRays } from '../../src/ray/trace.ts';
import { mostSamples } from '../../src/ray/accuracy.ts';
import type { RayBundle, RayResult } from '../../src/ray/types.ts';
import { InputError } from '../../src/units/input-error.ts';
import { frequencies, sceneOf } from './scenes.ts';

const square = (side: number, stepKpc: number): RayBundle => ({
  northKpc: Float64Array.from({ length: side * side }, (_, k) => (Math.floor(k / side) - (side - 1) / 2) * stepKpc),
  eastKpc: Float64Array.from({ length: side * side }, (_, k) => ((k % side) - (side - 1) / 2) * stepKpc),
});
const layers = ['{model: exponential-disc, normalisation: 1e-5 cm^-3, radius: 6 kpc, height: 1.5 kpc}'];
const waves = (perKpc: string, inclination: number): ReturnType<typeof sceneOf> =>
  sceneOf({ inclination, field: [`{model: formula, name: waves, parameters: {b: 3 uG}, field: {phi: "b*sin(${perKpc}*z)"}}`], layers });

test.each(['wasm', 'javascript'] as const)('a formula that oscillates without end is refused in words (%s)', (backEnd) => {
  const scene = waves('1e6', 40);
  const engine = makeRayEngine(scene, frequencies(1.4e9), backEnd);
  const scale = { scaleI: Float64Array.of(1e-5), scaleP: Float64Array.of(1e-5) };
  const refused = (): RayResult => traceRays(engine, scene, square(2, 3), scale);
  expect(refused).toThrow(InputError);
  expect(refused).toThrow(new RegExp(`the ray at north -1\\.5\\d* kpc, east -1\\.5\\d* kpc is not resolved .* ${mostSamples} samples.*oscillates.*edges.*numerics\\.tolerance`));
});

test.each(['wasm', 'javascript'] as const)('a formula that oscillates often is followed to its end (%s)', (backEnd) => {
  // 12 kpc / cos 40° of path hold 500 · 12 / 2π = 955 periods: of the order of a panel each.
  const scene = waves('500', 40);
  const engine = makeRayEngine(scene, frequencies(1.4e9), backEnd);
  const bundle = square(2, 1);
  const result = traceRays(engine, scene, bundle, findMapScale(engine, scene, bundle));
  expect(result.samples / 4).toBeGreaterThan(4 * 955);
  expect(result.samples / 4).toBeLessThan(mostSamples);
});

test.each(['wasm', 'javascript'] as const)('work cut by a budget of samples gives the same to the last bit (%s)', (backEnd) => {
  const scene = waves('20', 60);
  const engine = makeRayEngine(scene, frequencies(1.4e9, 4.8e9), backEnd);
  const bundle = square(5, 2);
  const scale = findMapScale(engine, scene, bundle);
  const whole = traceRays(engine, scene, bundle, scale);
  const parts: RayResult[] = [];
  for (let done = 0; done < 25; ) {
    const part = traceRays(engine, scene, bundle, scale, done, 25, 3000);
    parts.push(part);
    // The budget ends within the ray that used it up.
    expect(part.faradayDepth.length).toBeGreaterThan(0);
    const last = traceRays(engine, scene, bundle, scale, done + part.faradayDepth.length - 1, done + part.faradayDepth.length);
    expect(part.samples - last.samples).toBeLessThan(3000);
    done += part.faradayDepth.length;
  }
  expect(parts.length).toBeGreaterThan(2);
  expect(joinTiles(parts, 2)).toEqual(whole);
});

test('the budget of a call shrinks with the number of frequencies and holds many rays', () => {
  expect(sampleBudget(1)).toBeGreaterThan(256 * 1000);
  expect(sampleBudget(128)).toBeLessThan(sampleBudget(1) / 10);
});
