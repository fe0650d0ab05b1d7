import { polarizedErrors } from './equal-accuracy.ts';
import { follow, prepare, sceneAt, squareBundle, tolerance } from './prepare.ts';
import { cell, percentile } from './timing.ts';

/** Samples per ray and errors over the tolerance, from face-on to edge-on. */
export function countSamples(): void {
  console.log('\nsamples of a ray that hits, and errors of Q and U over the tolerance of 1e-4: true percentiles and largest stated');
  console.log('inclination   GHz samples/ray   median       90 %       99 %        max     stated');
  const bundle = squareBundle(41);
  for (const inclination of [0, 5, 40, 70, 88, 90]) {
    for (const frequencyHz of [1.4e9, 0.35e9]) {
      const result = follow(prepare(sceneAt(inclination), [frequencyHz], bundle, 'wasm'));
      const exact = follow(prepare(sceneAt(inclination, 1e-10), [frequencyHz], bundle, 'wasm'));
      const errors = polarizedErrors(result, exact).map((error) => error / tolerance);
      const hit = exact.I.filter((value) => value > 0).length;
      const shares = [0.5, 0.9, 0.99, 1].map((share) => cell(percentile(errors, share)));
      console.log(`${String(inclination).padStart(10)}° ${(frequencyHz / 1e9).toFixed(2).padStart(5)}${cell(result.samples / hit)} ${shares.join(' ')} ${cell(result.error[0] / tolerance)}`);
    }
  }
}
