import { cpuUsage } from 'node:process';
import spiralText from '../../../test/reference/a-spiral-quadrupole.yaml?raw';
import { makeSkyModel } from '../../infer/sky-model.ts';
import type { DataSet } from '../../infer/types.ts';
import { EngineCache, localBackend } from '../../ray/job.ts';
import { parseScene } from '../../scene/parse-scene.ts';
import { scenePath } from '../../scene/paths.ts';

const side = 41;
const models = 100;
const wanted = 1e5;
const path = 'galaxy.inclination';

/** How fast a sampler gets its models: Q and U of 41 x 41 pixels in three channels with a beam, every one of another inclination. */
export async function measureModels(): Promise<void> {
  const scene = parseScene(spiralText, 'a-spiral-quadrupole.yaml');
  const { get, set } = scenePath(scene, path);
  const { galaxy } = scene;
  const pixelDeg = ((2 * galaxy.volume.radiusKpc) / side / galaxy.distanceKpc) * (180 / Math.PI);
  const beam = { majorArcsec: 3 * 3600 * pixelDeg, minorArcsec: 3 * 3600 * pixelDeg, angle: 0 };
  const { raDeg, decDeg } = galaxy.centre ?? { raDeg: 0, decDeg: 0 };
  const middle = (side + 1) / 2;
  const data: DataSet = {
    axes: { nx: side, ny: side, wcs: { projection: 'SIN', raDeg, decDeg, crpixX: middle, crpixY: middle, cd: [-pixelDeg, 0, 0, pixelDeg] } },
    unit: 'Jy/beam', assumptions: [],
    bands: [1.4e9, 2.3e9, 4.8e9].map((frequencyHz) => ({ name: `${frequencyHz / 1e9} GHz`, channels: [{ frequencyHz, widthHz: 0 }], beam })),
    planes: [0, 1, 2].flatMap((band) => (['Q', 'U'] as const).map((quantity) => ({ quantity, band, channel: 0, values: new Float64Array(side * side), noise: 1 }))),
  };
  const secondsEach = async (backEnd: 'wasm' | 'javascript', count: number): Promise<number> => {
    const model = makeSkyModel(data, scene, (values) => set(scene, values[0]), localBackend(new EngineCache(backEnd)));
    const at = (k: number): Float64Array => Float64Array.of(get() * (1 + 1e-3 * Math.sin(k)));
    for (let k = 0; k < 5; k++) await model(at(-k));
    const before = cpuUsage();
    for (let k = 0; k < count; k++) await model(at(k));
    const { user, system } = cpuUsage(before);
    return (user + system) / 1e6 / count;
  };
  const [wasm, javascript] = [await secondsEach('wasm', models), await secondsEach('javascript', models / 4)];
  console.log(`models in a fit, ${side} x ${side} pixels, 3 channels, tolerance ${scene.numerics.tolerance}: ${(1 / wasm).toFixed(0)} a second of CPU, ${(javascript / wasm).toFixed(1)} times the JavaScript back end;`);
  console.log(`  ${wanted} models are ${((wanted * wasm) / 60).toFixed(0)} minutes of CPU, ${((wanted * wasm) / 120).toFixed(0)} minutes of two cores`);
}
