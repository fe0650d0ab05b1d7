import { expect, it } from 'vitest';
import { makeLikelihood } from '../../src/infer/likelihood.ts';
import { resolveFree } from '../../src/infer/free-parameters.ts';
import { sceneWith } from '../../src/infer/scene-of.ts';
import { makeSkyModel } from '../../src/infer/sky-model.ts';
import type { FreeText } from '../../src/infer/study-types.ts';
import type { DataSet } from '../../src/infer/types.ts';
import { localBackend } from '../../src/ray/job.ts';
import { parseScene } from '../../src/scene/parse-scene.ts';
import { smallScene } from '../cli/run.ts';
import { sharesBelowTruth, uniformDistance } from './calibration-runs.ts';
import { testAxes } from './grids.ts';

it('truths fall uniformly into posteriors of a small galaxy: 9 x 9 pixels, two bands, 3 parameters, 100 simulated observations', async () => {
  const scene = parseScene(smallScene, 'small.scene.yaml');
  const axes = testAxes(9, 9, 60);
  const beam = { majorArcsec: 120, minorArcsec: 120, angle: 0 };
  const bands = [1.4e9, 4.8e9].map((frequencyHz) => ({ name: `${frequencyHz / 1e9} GHz`, channels: [{ frequencyHz, widthHz: 0 }], beam }));
  const planes = bands.flatMap((_, band) => (['Q', 'U'] as const).map((quantity) => ({ quantity, band, channel: 0, values: new Float64Array(81), noise: 4e-4, correlation: beam })));
  const data: DataSet = { axes, unit: 'Jy/beam', bands, planes, assumptions: [] };
  const place = { file: 'a' };
  const range = (path: string, low: string, high: string): FreeText => ({ path, kind: 'uniform', values: [{ text: low, place }, { text: high, place }], place });
  const free = [range('field.disc.strength', '2 uG', '12 uG'), range('field.halo.strength', '-5 uG', '5 uG'), range('field.disc.pitch', '-45 deg', '-5 deg')];
  const parameters = resolveFree(free, scene);
  const forward = makeSkyModel(data, scene, (values) => sceneWith(scene, free.map(({ path }) => path), values), localBackend());
  const shares = await sharesBelowTruth(parameters, forward, makeLikelihood(data), 100, 60);
  const distances = parameters.map((_, j) => uniformDistance(shares.map((share) => share[j])));
  console.log(`distances from uniform: ${distances.map((distance) => distance.toFixed(2)).join(', ')}`);
  // Beyond 1.95 once in 1000 (Kolmogorov 1933).
  for (const distance of distances) expect(distance).toBeLessThan(1.95);
}, 7_200_000);
