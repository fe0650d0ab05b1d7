import { readFileSync } from 'node:fs';
import { expect, test } from 'vitest';
import { traceFieldLines } from '../../src/ray/field-lines.ts';
import { localBackend } from '../../src/ray/job.ts';
import { followSightline } from '../../src/ray/sightline.ts';
import { parseScene } from '../../src/scene/parse-scene.ts';
import type { Scene } from '../../src/scene/types.ts';

const reference = (name: string): Scene => parseScene(readFileSync(`test/reference/${name}.yaml`, 'utf8'), name);

const withField = (field: string): Scene =>
  parseScene(
    `gyrelight: 1
galaxy: {distance: 10 Mpc, inclination: 40 deg, positionAngle: 25 deg, volume: {radius: 10 kpc, height: 3 kpc}}
field: [${field}]
thermalElectrons: [{model: slab, density: 0.02 cm^-3, halfThickness: 1 kpc}]
cosmicRays: {index: 2.8, layers: [{model: slab, normalisation: 1e-5 cm^-3, halfThickness: 1 kpc}]}
observation: {image: {pixels: 3, pixel: 1 kpc}, bands: [{name: L, at: [1.4 GHz]}]}
`,
    'scene',
  );

test.each(['a-spiral-quadrupole', 'd-damped-helical'])('the pieces of a line of sight add up to what the ray transfer finds: %s', async (name) => {
  // Two ways through the same scene; the midpoint sums of 4000 pieces are good to 1e-4 of the emission.
  const scene = reference(name);
  const spectrum = [1.4e9, 4.8e9].map((frequencyHz) => ({ frequencyHz, centreHz: frequencyHz }));
  const [north, east] = [3.1, -2.2];
  const rays = await localBackend()({ scene, spectrum, bundle: { northKpc: Float64Array.of(north), eastKpc: Float64Array.of(east) } });
  const sightline = followSightline(scene, north, east, spectrum, 4000);
  if (!sightline) throw new Error('the ray crosses the galaxy');
  const step = sightline.sKpc[1] - sightline.sKpc[0];
  spectrum.forEach((_, k) => {
    const { emission, share, P, emittedP } = sightline.light[k];
    const I = emission.reduce((sum, value) => sum + value * step, 0);
    expect(Math.abs(I / rays.I[k] - 1)).toBeLessThan(1e-4);
    expect(Math.abs(emittedP / rays.emittedP[k] - 1)).toBeLessThan(1e-4);
    expect(Math.abs(P - Math.hypot(rays.Q[k], rays.U[k]))).toBeLessThan(1e-4 * emittedP);
    expect(Math.abs(share.reduce((sum, value) => sum + value, 0) - P)).toBeLessThan(1e-9 * emittedP);
  });
  expect(Math.abs(sightline.depth[0] - rays.faradayDepth[0])).toBeLessThan(1e-3 * Math.abs(rays.faradayDepth[0]) + 1e-3);
  expect(followSightline(scene, 400, 0, spectrum)).toBeUndefined();
});

test('a line of sight through a uniform slab has the depth and height of geometry', () => {
  // Closed form: φ to height z below the near face is K n B_z (h - z), physics.md sections 1 and 2.
  const scene = withField('{model: uniform, x: 0 uG, y: 0 uG, z: 2 uG}');
  const sightline = followSightline(scene, 0, 0, [{ frequencyHz: 1.4e9, centreHz: 1.4e9 }], 3000);
  if (!sightline) throw new Error('the ray crosses the galaxy');
  const cosI = Math.cos((40 * Math.PI) / 180);
  sightline.zKpc.forEach((z, k) => {
    if (Math.abs(z) < 0.999) expect(Math.abs(sightline.depth[k] - 811.901164165 * 0.02 * 2 * (1 - z))).toBeLessThan(0.2);
    expect(Math.abs(sightline.alongUG[k] - 2 * cosI)).toBeLessThan(1e-12);
  });
});

test('field lines of a uniform field are straight, those of an azimuthal one are circles', () => {
  for (const { pointsKpc } of traceFieldLines(withField('{model: uniform, x: 1 uG, y: 0.5 uG, z: 0 uG}'), { count: 12 })) {
    const count = pointsKpc.length / 3;
    const [dx, dy] = [pointsKpc[3 * (count - 1)] - pointsKpc[0], pointsKpc[3 * (count - 1) + 1] - pointsKpc[1]];
    expect(Math.abs(dy / dx - 0.5)).toBeLessThan(1e-9);
    expect(dx).toBeGreaterThan(0);
  }
  const circle = withField('{model: formula, name: ring, parameters: {S: 1 uG}, field: {phi: "S*r/(1+r)"}}');
  const lines = traceFieldLines(circle, { count: 12, tolerance: 1e-7 });
  expect(lines.length).toBeGreaterThan(8);
  for (const { pointsKpc } of lines) {
    const radius = (k: number): number => Math.hypot(pointsKpc[3 * k], pointsKpc[3 * k + 1]);
    for (let k = 0; k < pointsKpc.length / 3; k++) expect(Math.abs(radius(k) / radius(0) - 1)).toBeLessThan(1e-4);
  }
});

test('field lines of the spiral disc keep its pitch angle near the plane', () => {
  // B_r/B_φ = tan p in the plane (physics.md section 4.1), so that r = r0 exp(φ tan p).
  const scene = withField('{model: axisymmetric-spiral, strength: 5 uG, pitch: -20 deg, radius: 8 kpc, innerRadius: 1 kpc, height: 1 kpc, closure: 4 kpc}');
  let tested = 0;
  for (const { pointsKpc } of traceFieldLines(scene, { count: 24, tolerance: 1e-6 })) {
    for (let k = 1; k < pointsKpc.length / 3; k++) {
      const [x0, y0, z0, x1, y1, z1] = pointsKpc.slice(3 * k - 3, 3 * k + 3);
      const [r0, r1] = [Math.hypot(x0, y0), Math.hypot(x1, y1)];
      const turn = Math.atan2(x0 * y1 - y0 * x1, x0 * x1 + y0 * y1);
      if (Math.abs(z0) > 0.03 || Math.abs(z1) > 0.03 || r0 < 3 || Math.abs(turn) < 0.01) continue;
      tested++;
      expect(Math.abs(Math.log(r1 / r0) / turn - Math.tan((-20 * Math.PI) / 180))).toBeLessThan(0.01);
    }
  }
  expect(tested).toBeGreaterThan(20);
});
