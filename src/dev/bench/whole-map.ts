import { localBackend, type RayJob } from '../../ray/job.ts';
import { imageStride } from '../../sky/image-stride.ts';
import { traceImage, type ImageRays } from '../../sky/image-rays.ts';
import { stepsForTolerance } from './equal-accuracy.ts';
import { channels, sceneAt, sideKpc, squareBundle } from './prepare.ts';
import { compileC, runReference } from './references.ts';
import { cell, type Timed } from './timing.ts';

const side = 513;
/** What a preview of the page looks at: src/app/compute/work-column.ts. */
const preview = { side: 33, tolerance: 2e-3 };

/** A map as `gyrelight map` follows it on one core, and a preview of it. */
export async function timeWholeMap(folder: string): Promise<void> {
  const scene = sceneAt(40);
  const spectrum = channels(3).map((hz) => ({ frequencyHz: hz, centreHz: hz }));
  const backend = localBackend();
  const map = async (rows: number, tolerance: number, runs: number): Promise<Timed<ImageRays>> => {
    const job: RayJob = { scene: { ...scene, numerics: { ...scene.numerics, tolerance } }, spectrum, bundle: squareBundle(rows), origins: false };
    const lattice = { nx: rows, ny: rows, stride: imageStride(scene, { nx: rows, ny: rows, pixelKpc: sideKpc / rows }) };
    let best: Timed<ImageRays> | undefined;
    for (let k = 0; k < runs; k++) {
      const start = process.cpuUsage();
      const value = await traceImage(backend, job, lattice, {});
      const { user, system } = process.cpuUsage(start);
      if (!best || user + system < 1e6 * best.seconds) best = { value, seconds: (user + system) / 1e6 };
    }
    if (!best) throw new Error('no runs');
    return best;
  };
  const whole = await map(side, scene.numerics.tolerance, 3);
  const pixels = side * side;
  console.log(`\nwhole map, ${side}² pixels, three channels, one core; faint parts are exact beside themselves too`);
  console.log(`μs of CPU per pixel ${cell((1e6 * whole.seconds) / pixels)}   rays followed ${((100 * whole.value.followed) / pixels).toFixed(1)} %   samples per pixel ${cell(whole.value.result.samples / pixels)}`);
  const c = compileC(folder);
  if (c) {
    const reference = runReference(c, folder, scene, side, stepsForTolerance(scene, 1.4e9), channels(3), 2);
    console.log(`C fixed step       ${cell((1e6 * reference.seconds) / pixels)}   ratio ${cell(reference.seconds / whole.seconds)}`);
  }
  const full = await map(129, scene.numerics.tolerance, 5);
  const quick = await map(preview.side, preview.tolerance, 10);
  console.log(`preview: ${preview.side}² pixels at ${preview.tolerance} take 1/${(full.seconds / quick.seconds).toFixed(0)} of a map of 129² pixels and 1/${(whole.seconds / quick.seconds).toFixed(0)} of one of ${side}²; stated error ${Math.max(...quick.value.result.error).toExponential(1)}`);
}
