import { expect, test } from 'vitest';
import { localBackend } from '../../src/ray/job.ts';
import { findMapScale, makeRayEngine, traceRays } from '../../src/ray/trace.ts';
import { wavelengthSquared } from '../../src/ray/synchrotron.ts';
import { parseScene } from '../../src/scene/parse-scene.ts';
import { gridFromScene, gridOffsetsKpc } from '../../src/sky/grid.ts';
import { observe } from '../../src/sky/observe.ts';

const tolerance = 1e-5;
const text = (heightLaw: string, foreground: string): string =>
  [
    'gyrelight: 1',
    'title: wide channels',
    'galaxy: {distance: 10 Mpc, inclination: 55 deg, positionAngle: 140 deg, volume: {radius: 15 kpc, height: 6 kpc}}',
    'field:',
    '  - {model: axisymmetric-spiral, strength: 8 uG, pitch: -20 deg, radius: 8 kpc, innerRadius: 1 kpc, height: 0.8 kpc, closure: 4 kpc}',
    '  - {model: quadrupole-halo, strength: 2 uG, core: 2 kpc, reference: 5 kpc}',
    'thermalElectrons: [{model: sech2-disc, density: 0.04 cm^-3, radius: 10 kpc, height: 1 kpc}]',
    `cosmicRays: {index: 2.8, layers: [{model: exponential-disc, normalisation: 1e-5 cm^-3, radius: 6 kpc, height: 1.5 kpc${heightLaw}}]}`,
    'turbulence: {unresolved: {rms: 1 uG, cell: 0.05 kpc}}',
    'observation:',
    '  image: {pixels: 7, pixel: 2.6 kpc}',
    '  bands:',
    '    - {name: low, at: [0.7 GHz], width: 60 MHz}',
    '    - {name: L, from: 1.2 GHz, to: 1.8 GHz, channels: 3}',
    '    - {name: single, at: [4.8 GHz]}',
    `  foreground: {${foreground}}`,
    `numerics: {tolerance: ${tolerance}, bits: 64}`,
  ].join('\n');

test.each([
  ['constant foreground', '', 'depth: -40 rad/m^2'],
  ['foreground with a gradient, heights that depend on frequency', ', heightIndex: 0.5, heightAt: 1.4 GHz', 'depth: 25 rad/m^2, gradient: {amount: 3 rad/m^2/kpc, angle: 30 deg}'],
])('channels are means over frequency, after the foreground: %s', async (_, heightLaw, foreground) => {
  const scene = parseScene(text(heightLaw, foreground), 'bands.yaml');
  const sky = await observe(scene, localBackend());
  const bundle = gridOffsetsKpc(gridFromScene(scene));
  const rays = bundle.northKpc.length;
  const { foregroundDepth, foregroundGradient } = scene.observation;
  const angle = foregroundGradient?.angle ?? 0;
  const depths = Array.from(bundle.northKpc, (north, k) => foregroundDepth + (foregroundGradient?.radM2PerKpc ?? 0) * (north * Math.cos(angle) + bundle.eastKpc[k] * Math.sin(angle)));
  for (const cube of sky.cubes) {
    cube.channels.forEach(({ frequencyHz, widthHz }, channel) => {
      // The mean by the midpoint rule over many equal parts of the channel.
      const parts = widthHz === 0 ? 1 : 200;
      const spectrum = Array.from({ length: parts }, (_, k) => ({ frequencyHz: frequencyHz + widthHz * ((k + 0.5) / parts - 0.5), centreHz: frequencyHz }));
      const fine = { ...scene, numerics: { ...scene.numerics, tolerance: 1e-7 } };
      const engine = makeRayEngine(fine, spectrum);
      const result = traceRays(engine, fine, bundle, findMapScale(engine, fine, bundle));
      const mean = { I: new Float64Array(rays), Q: new Float64Array(rays), U: new Float64Array(rays) };
      spectrum.forEach((point, f) => {
        for (let ray = 0; ray < rays; ray++) {
          const turn = 2 * wavelengthSquared(point.frequencyHz) * depths[ray];
          const [Q, U] = [result.Q[f * rays + ray], result.U[f * rays + ray]];
          mean.I[ray] += result.I[f * rays + ray] / parts;
          mean.Q[ray] += (Math.cos(turn) * Q - Math.sin(turn) * U) / parts;
          mean.U[ray] += (Math.sin(turn) * Q + Math.cos(turn) * U) / parts;
        }
      });
      const scaleI = Math.max(...mean.I);
      const scaleP = Math.max(1e-3 * scaleI, ...mean.Q.map((Q, ray) => Math.hypot(Q, mean.U[ray])));
      const plane = (values: ArrayLike<number>, ray: number): number => values[channel * rays + ray];
      for (let ray = 0; ray < rays; ray++) {
        // Rays and channel means may each be off by the tolerance; the midpoint rule by 1e-6.
        expect(Math.abs(plane(cube.I, ray) - mean.I[ray])).toBeLessThan(2.5 * tolerance * scaleI);
        expect(Math.abs(plane(cube.Q, ray) - mean.Q[ray])).toBeLessThan(2.5 * tolerance * scaleP);
        expect(Math.abs(plane(cube.U, ray) - mean.U[ray])).toBeLessThan(2.5 * tolerance * scaleP);
      }
    });
  }
  const engine = makeRayEngine(scene, [{ frequencyHz: 1e9, centreHz: 1e9 }]);
  const { faradayDepth } = traceRays(engine, scene, bundle, findMapScale(engine, scene, bundle));
  // Depths of a few hundred rad m^-2, each good to 1e-5 of the turn they make at 0.7 GHz.
  for (let ray = 0; ray < rays; ray++) expect(Math.abs(sky.faradayDepth[ray] - depths[ray] - faradayDepth[ray])).toBeLessThan(1e-3);
});
