import { expect, test } from 'vitest';
import { localBackend } from '../../src/ray/job.ts';
import { riceAligned, riceTotal } from '../../src/ray/rice.ts';
import { intrinsicPolarization } from '../../src/ray/synchrotron.ts';
import { parseScene } from '../../src/scene/parse-scene.ts';
import type { Scene } from '../../src/scene/types.ts';
import { planDepths } from '../../src/sky/depth-spectrum.ts';
import { lambda2M2 } from '../../src/sky/wavelength.ts';
import { depthSearch, fitRotationMeasure } from '../../src/sky/rotation-measure.ts';
import { checkRow } from '../reference/check-rows.ts';
import { relativeError } from '../sky/compare.ts';
import { ringLight } from './ring-light.ts';

const radian = Math.PI / 180;

/**
 * Rows of the check values (Krause 1990; Sofue et al. 1986; Burn 1966 for the half; from memory):
 * i = 30 deg, p = -20 deg, beta = 40 deg. B_parallel/B, RM of a source behind a layer of 1 kpc with
 * n_e = 0.03, B = 5 and of the layer itself, and B_perp/B.
 */
const published = {
  parallel: { azimuthDeg: [0, 70, 160, 250], value: checkRow('10.ass') },
  rotation: { behind: checkRow('10.amp')[0], mixed: checkRow('10.amp')[1] },
  bisymmetric: { azimuthDeg: [0, 10, 100], value: checkRow('10.bss') },
  across: { azimuthDeg: [-20, 70, 0], value: checkRow('10.PI').slice(0, 3) },
} as const;

/** A layer 1 kpc thick of a planar field of constant strength 5 uG, pitch -20 deg, times a factor of azimuth. */
function layer(electrons: number, factor = '1', index = 2.6, random = 0): Scene {
  return parseScene(
    `gyrelight: 1
galaxy: {distance: 10 Mpc, inclination: 30 deg, positionAngle: 0 deg, volume: {radius: 400 kpc, height: 2 kpc}}
field:
  - {model: formula, name: planar, parameters: {B: 5 uG, p: -20 deg, b: 40 deg}, field: {x: "B*(${factor})*(sin(p)*cos(phi) - cos(p)*sin(phi))", y: "B*(${factor})*(sin(p)*sin(phi) + cos(p)*cos(phi))", z: "0*B"}}
thermalElectrons: [{model: slab, density: ${electrons} cm^-3, halfThickness: 0.5 kpc}]
cosmicRays: {index: ${index}, layers: [{model: slab, normalisation: 1e-5 cm^-3, halfThickness: 0.5 kpc}]}
${random > 0 ? `turbulence: {unresolved: {rms: ${random} uG, cell: 0.05 kpc}}\n` : ''}observation: {image: {pixels: 3, pixel: 1 kpc}, bands: [{name: L, at: [1.4 GHz]}]}
numerics: {tolerance: 1e-8}
`,
    'layer.scene.yaml',
  );
}

/** Far out the azimuth does not change along the ray: 0.3 kpc in 300 kpc. */
const radiusKpc = 300;

async function rotations(scene: Scene, azimuthDeg: readonly number[]): Promise<number[]> {
  const frequencies = [8e9, 9e9, 10e9];
  const azimuths = azimuthDeg.map((value) => value * radian);
  const { Q, U } = await ringLight(scene, radiusKpc, azimuths, frequencies);
  const search = depthSearch(frequencies.map(lambda2M2), 1000);
  return azimuths.map((_, k) => {
    const pick = (planes: Float64Array): number[] => frequencies.map((__, f) => planes[f * azimuths.length + k]);
    return fitRotationMeasure(search, pick(Q), pick(U), [0, 0, 0])?.rm ?? NaN;
  });
}

test('an axisymmetric spiral: RM is that of the formula, half where emission and rotation mix', async () => {
  const rm = await rotations(layer(0.03), published.parallel.azimuthDeg);
  rm.forEach((value, k) => {
    // RM = amplitude * B_parallel/(B sin i); a mid-plane azimuth holds to 1e-3 along the ray.
    const expected = (published.rotation.mixed * published.parallel.value[k]) / Math.sin(30 * radian);
    expect(Math.abs(value - expected)).toBeLessThan(2e-3 * published.rotation.mixed);
  });
  const azimuth = 160 * radian;
  const bundle = { northKpc: Float64Array.of(radiusKpc * Math.cos(azimuth)), eastKpc: Float64Array.of(radiusKpc * Math.sin(azimuth) * Math.cos(30 * radian)) };
  const { faradayDepth } = await localBackend()({ scene: layer(0.03), spectrum: [{ frequencyHz: 1e10, centreHz: 1e10 }], bundle });
  expect(relativeError(faradayDepth[0], published.rotation.behind)).toBeLessThan(2e-3);
});

test('a bisymmetric spiral has two periods and an offset', async () => {
  const rm = await rotations(layer(0.03, 'cos(phi - b)'), published.bisymmetric.azimuthDeg);
  const amplitude = -published.rotation.mixed;
  rm.forEach((value, k) => expect(Math.abs(value - amplitude * published.bisymmetric.value[k])).toBeLessThan(4e-3 * published.rotation.mixed));
});

test('polarized intensity is brightest near the minor axis, as B_perp^((p+1)/2)', async () => {
  const azimuths = published.across.azimuthDeg.map((value) => value * radian);
  const { Q, U } = await ringLight(layer(0), radiusKpc, azimuths, [5e9]);
  const P = Q.map((q, k) => Math.hypot(q, U[k]));
  // gamma = 2.6: exponent 1.8; the path is as long everywhere.
  published.across.value.forEach((value, k) => expect(relativeError(P[k] / P[1], value ** 1.8)).toBeLessThan(2e-3));
});

test('isotropic turbulence depolarizes at all wavelengths: 1/(1 + 2 q^2/3) for emission like B_perp^2', async () => {
  // Burn 1966; Sokoloff et al. 1998: q = b/B_perp, b the three-dimensional rms.
  for (const [q, id] of [[1, '5.wi.b1'], [2, '5.wi.b2'], [0.5, '5.wi.b0.5']] as const) {
    const [expected] = checkRow(id);
    // At azimuth 70 deg the whole field of 5 uG lies across the line of sight; rms of one component b/sqrt 3.
    const scene = layer(0, '1', 3, (5 * q) / Math.sqrt(3));
    const azimuth = 70 * radian;
    const bundle = { northKpc: Float64Array.of(radiusKpc * Math.cos(azimuth)), eastKpc: Float64Array.of(radiusKpc * Math.sin(azimuth) * Math.cos(30 * radian)) };
    const { I, Q, U } = await localBackend()({ scene, spectrum: [{ frequencyHz: 5e9, centreHz: 5e9 }], bundle });
    // The azimuth changes by 1e-3 along the ray: 1e-6 of B_perp^2.
    expect(relativeError(Math.hypot(Q[0], U[0]) / I[0] / intrinsicPolarization(3), expected)).toBeLessThan(1e-5);
  }
});

test('where the electrons go with the energy of the field, turbulence depolarizes less: emission like B^2 B_perp^2', () => {
  // Equipartition (Sokoloff et al. 1998). B^2 = B_perp^2 + B_par^2 with a mean B_par^2 of b^2/3, independent
  // of B_perp: the means needed are those of B_perp^4 and B_perp^2 that transfer itself uses.
  for (const [q, id] of [[1, '5.wi.b1'], [2, '5.wi.b2'], [0.5, '5.wi.b0.5']] as const) {
    const variance = (q * q) / 3;
    const m = 1 + 2 * variance;
    const [all, aligned] = [riceTotal, riceAligned].map((mean, part) => (power: number) => m ** (power / 2) * mean(power, 1 / m) * (part === 0 ? 1 : 1 / m));
    const share = (aligned(4) + variance * aligned(2)) / (all(4) + variance * all(2));
    expect(relativeError(share, checkRow(id)[1])).toBeLessThan(1e-9);
  }
});

test('uniform coverage of lambda^2: width 3.791/span, largest depth 1.895/channel, scale pi/lambda_min^2', () => {
  // Brentjens & de Bruyn 2005 print 2 sqrt 3 and sqrt 3 (8.6 % small); the numerical values, Schnitzeler et al. 2009.
  const count = 4000;
  const [low, high] = [0.02, 0.09];
  const lambda2 = Array.from({ length: count }, (_, k) => low + ((high - low) * (k + 0.5)) / count);
  const plan = planDepths(lambda2.map((square) => ({ frequencyHz: 299792458 / Math.sqrt(square), widthHz: 0 })), new Float64Array(count));
  // A sum of 4000 against the integral: 1e-7.
  expect(relativeError(plan.resolution * (high - low), checkRow('6.fwhm')[0])).toBeLessThan(1e-6);
  expect(relativeError((plan.largestDepth * (high - low)) / count, checkRow('6.chan')[0])).toBeLessThan(1e-6);
  expect(relativeError(plan.largestScale * lambda2[0], checkRow('6.maxscale')[0])).toBeLessThan(1e-12);
});
