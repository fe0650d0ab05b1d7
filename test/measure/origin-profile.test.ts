import { expect, test } from 'vitest';
import { originProfiles } from '../../src/measure/origin-profile.ts';
import { localBackend } from '../../src/ray/job.ts';
import { faradayDepthPerKpc } from '../../src/ray/synchrotron.ts';
import { gridOffsetsKpc } from '../../src/sky/grid.ts';
import { observe } from '../../src/sky/observe.ts';
import { lambda2M2 } from '../../src/sky/wavelength.ts';
import { referenceScene } from './ring-light.ts';
import { slabScene } from './slab-scene.ts';

const centre = { northKpc: Float64Array.of(0), eastKpc: Float64Array.of(0) };
const at = (frequencyHz: number) => [{ frequencyHz, centreHz: frequencyHz }];

test('without rotation the whole slab is seen evenly', () => {
  const [[layer]] = originProfiles(slabScene(0, 2), centre, at(1.4e9), [0], 1);
  // Heights fall into bins of 2 pc.
  expect(Math.abs(layer.lowKpc + 0.68)).toBeLessThan(0.005);
  expect(Math.abs(layer.medianKpc)).toBeLessThan(0.005);
  expect(Math.abs(layer.highKpc - 0.68)).toBeLessThan(0.005);
  expect(Math.abs(layer.meanKpc)).toBeLessThan(1e-12);
  expect(Math.abs(layer.nearShare - 0.5)).toBeLessThan(1e-9);
  expect(layer.cancelledShare).toBe(0);
});

test("Burn's slab: shares cos(R lambda^2 t), by closed forms, from both sides", () => {
  // a = R lambda^2 of the whole slab, 0.9 pi at 1.4 GHz.
  const a = 0.9 * Math.PI;
  const along = 2;
  const electrons = a / lambda2M2(1.4e9) / (faradayDepthPerKpc * along * 2);
  for (const inclination of [0, 180]) {
    const [[layer]] = originProfiles(slabScene(electrons, along, inclination), centre, at(1.4e9), [0], 1);
    // Positive where |t| < pi/(2 a): cumulative (1 + sin(a t))/2.
    const quantile = Math.asin(2 * 0.84 - 1) / a;
    expect(Math.abs(layer.highKpc - quantile)).toBeLessThan(0.005);
    expect(Math.abs(layer.lowKpc + quantile)).toBeLessThan(0.005);
    // 8 nodes a panel: the sign of the share changes inside panels, each of 1/16 of the slab or less.
    expect(Math.abs(layer.cancelledShare - (1 - Math.sin(a)) / (2 - Math.sin(a)))).toBeLessThan(0.005);
    expect(Math.abs(layer.nearShare - 0.5)).toBeLessThan(0.002);
  }
});

test('a turbulent slab is seen at its near face', () => {
  const turbulent = { ...slabScene(0.05, 0), turbulence: { unresolved: { rmsUG: 2, cellKpc: 0.05 } } };
  for (const [inclination, sign] of [[0, 1], [180, -1]]) {
    const turned = { ...turbulent, galaxy: { ...turbulent.galaxy, inclination: (inclination * Math.PI) / 180 } };
    const [[long, short]] = originProfiles(turned, centre, [...at(1e9), ...at(3e10)], [0], 1);
    expect(sign * long.medianKpc).toBeGreaterThan(0.3);
    expect(long.nearShare).toBeGreaterThan(0.8);
    expect(Math.abs(short.medianKpc)).toBeLessThan(0.05);
  }
});

test('the mean height is that of the maps, and regions add their rays', async () => {
  const scene = referenceScene('d-damped-helical');
  const { grid, origins } = await observe(scene, localBackend());
  const bundle = gridOffsetsKpc(grid);
  const [origin] = origins;
  const spectrum = origin.frequenciesHz.map((frequencyHz) => ({ frequencyHz, centreHz: frequencyHz }));
  const pixels = grid.nx * grid.ny;
  const layers = originProfiles(scene, bundle, spectrum, Int32Array.from({ length: pixels }, (_, k) => k), pixels);
  let compared = 0;
  for (let k = 0; k < pixels; k++) {
    spectrum.forEach((_, f) => {
      const expected = origin.heightKpc[f * pixels + k];
      if (Number.isNaN(expected) || Number.isNaN(layers[k][f].meanKpc)) return;
      compared++;
      // Maps are exact to 1e-4 of the largest P; where |P| is a hundredth of what is emitted that grows.
      expect(Math.abs(layers[k][f].meanKpc - expected)).toBeLessThan(0.05);
    });
  }
  expect(compared).toBeGreaterThan(pixels);
  const joined = originProfiles(scene, bundle, spectrum, Int32Array.from({ length: pixels }, (_, k) => (k % 2 === 0 ? 0 : -1)), 1);
  expect(joined[0][1].rays).toBeGreaterThan(50);
  // The long wavelength shows a nearer, thinner layer than the short one.
  expect(joined[0][1].nearShare).toBeGreaterThan(joined[0][3].nearShare);
});
