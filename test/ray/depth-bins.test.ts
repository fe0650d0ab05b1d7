import { expect, test } from 'vitest';
import { makeDepthBinner, type DepthBins } from '../../src/ray/depth-bins.ts';
import { localBackend } from '../../src/ray/job.ts';
import { faradayDepthPerKpc } from '../../src/ray/synchrotron.ts';
import { parseScene } from '../../src/scene/parse-scene.ts';
import type { Scene } from '../../src/scene/types.ts';
import { lambda2M2 } from '../../src/sky/wavelength.ts';
import { InputError } from '../../src/units/input-error.ts';
import { relativeError } from '../sky/compare.ts';
import { smallScene } from '../cli/run.ts';
import { slabScene } from '../measure/slab-scene.ts';

const centre = { northKpc: Float64Array.of(0), eastKpc: Float64Array.of(0) };
const at = (...frequenciesHz: number[]) => frequenciesHz.map((frequencyHz) => ({ frequencyHz, centreHz: frequencyHz }));

function binsOf(scene: Scene, frequencyHz: number, bundle: typeof centre, width: number, foreground = 0): DepthBins {
  const binner = makeDepthBinner(scene, at(frequencyHz), bundle.northKpc.length, width);
  binner.add(bundle, [...bundle.northKpc.keys()], bundle.northKpc.map(() => foreground));
  return binner.done();
}

/** The small scene without cells that depolarize. */
function quietScene(tolerance: number): Scene {
  const scene = parseScene(smallScene, 's.yaml');
  return { ...scene, turbulence: {}, numerics: { ...scene.numerics, tolerance } };
}

/** P(lambda^2) of a ray whose emission is spread evenly over each bin: sinc(width lambda^2) of that at the middle. */
function transform({ bins, firstDepth, width }: DepthBins, ray: number, lambda2: number): readonly [number, number] {
  let [Q, U] = [0, 0];
  const spread = Math.sin(lambda2 * width) / (lambda2 * width);
  bins.forEach((bin, k) => {
    if (!bin) return;
    const angle = 2 * lambda2 * (firstDepth + k * width);
    Q += Math.cos(angle) * bin.Q[ray] - Math.sin(angle) * bin.U[ray];
    U += Math.sin(angle) * bin.Q[ray] + Math.cos(angle) * bin.U[ray];
  });
  return [spread * Q, spread * U];
}

test("Burn's slab is a box from the foreground's depth to that through the slab, for either sign", async () => {
  // F is P(0)/R between 0 and R (Burn 1966, eq. 3 of a uniform slab); R = 812 n B L, of the path in kpc.
  const frequencyHz = 1e12;
  for (const along of [2, -2]) {
    const scene = slabScene(0.03, along);
    const R = faradayDepthPerKpc * 0.03 * along * 2;
    // At so short a wavelength nothing has turned: P of the ray itself, by the tracer.
    const ray = await localBackend()({ scene, spectrum: at(frequencyHz), bundle: centre });
    const { bins, firstDepth, width } = binsOf(scene, frequencyHz, centre, 7, 12);
    const [low, high] = [12 + Math.min(0, R), 12 + Math.max(0, R)];
    bins.forEach((bin, k) => {
      const middle = firstDepth + k * width;
      const overlap = Math.max(0, Math.min(high, middle + width / 2) - Math.max(low, middle - width / 2));
      // 1e-4 of a full bin: the tolerance of the ray, though for a slab both are exact but for rounding.
      expect(Math.abs((bin?.Q[0] ?? 0) - (ray.Q[0] * overlap) / Math.abs(R))).toBeLessThan((1e-4 * Math.abs(ray.Q[0]) * width) / Math.abs(R));
    });
    const sum = bins.reduce((total, bin) => total + (bin?.Q[0] ?? 0), 0);
    expect(relativeError(sum, ray.Q[0])).toBeLessThan(1e-6);
  }
});

test('the transform of the bins is what rays bring where no cells depolarize', async () => {
  const scene = quietScene(1e-7);
  const bundle = { northKpc: Float64Array.of(2, -1, 0.5, 4), eastKpc: Float64Array.of(1, 3, -2.5, -4) };
  const width = 0.1;
  for (const frequencyHz of [1.4e9, 0.8e9]) {
    const bins = binsOf(scene, frequencyHz, bundle, width);
    const exact = await localBackend()({ scene, spectrum: at(frequencyHz), bundle });
    for (let ray = 0; ray < 4; ray++) {
      const [Q, U] = transform(bins, ray, lambda2M2(frequencyHz));
      let emitted = 0;
      for (const bin of bins.bins) emitted += bin ? Math.hypot(bin.Q[ray], bin.U[ray]) : 0;
      // Where within its bin light lies is lost: at most width lambda^2 = 0.014 rad of its angle at 0.8 GHz, for the few per cent
      // that lie at one depth, behind the gas. Bins of 0.5 rad/m^2 gave 2.8e-3, these 3.4e-4.
      expect(Math.hypot(Q - exact.Q[ray], U - exact.U[ray]) / emitted).toBeLessThan(5e-4);
    }
  }
});

test('narrower bins add up to wider ones, and bins beyond count are refused', () => {
  const scene = quietScene(1e-4);
  const bundle = { northKpc: Float64Array.of(2), eastKpc: Float64Array.of(1) };
  const [wide, narrow] = [9, 3].map((width) => binsOf(scene, 1.4e9, bundle, width));
  const largest = Math.max(...wide.bins.map((bin) => Math.hypot(bin?.Q[0] ?? 0, bin?.U[0] ?? 0)));
  wide.bins.forEach((bin, k) => {
    // Three narrow bins, the middle one at the same place.
    const middle = Math.round((wide.firstDepth + 9 * k - narrow.firstDepth) / 3);
    const sum = [-1, 0, 1].reduce((total, step) => total + (narrow.bins[middle + step]?.U[0] ?? 0), 0);
    expect(Math.abs((bin?.U[0] ?? 0) - sum) / largest).toBeLessThan(0.01);
  });
  expect(() => binsOf(scene, 1.4e9, bundle, 1e-3)).toThrow(InputError);
});
