import { describe, expect, it } from 'vitest';
import { foregroundNuisance, calibrationParameters, withCalibration } from '../../src/infer/nuisances.ts';
import { logPriorScaled, valuesFromCube } from '../../src/infer/prior-cube.ts';
import { scaledFromValue, slopeFromScaled, valueFromScaled } from '../../src/infer/prior.ts';
import type { FreeParameter, Prior } from '../../src/infer/prior.ts';
import { parseStudy } from '../../src/infer/study.ts';
import { sceneWith } from '../../src/infer/scene-of.ts';
import { compileTie, followTies, shownValue } from '../../src/infer/ties.ts';
import { normalQuantile, normalShare } from '../../src/math/normal-quantile.ts';
import { parseScene } from '../../src/scene/parse-scene.ts';
import { needPython, pythonJson } from '../support/tools.ts';
import { readFileSync } from 'node:fs';

const parameter = (prior: Prior, allowed: [number, number] = [-Infinity, Infinity]): FreeParameter => ({
  path: 'a', unit: '', shownUnit: '', prior, allowed, start: 1,
});
const rad = Math.PI / 180;

describe('valuesFromCube', () => {
  it('has the quantiles of scipy.stats: normal, truncated normal, log-uniform, isotropic', (context) => {
    needPython(context, 'scipy');
    const cube = [1e-6, 0.02, 0.3, 0.5, 0.77, 0.999];
    const code = `
import json, sys, numpy as np
from scipy import stats
u = np.array(json.loads(sys.stdin.read()))
print(json.dumps([list(stats.norm.ppf(u, 40, 2)), list(stats.truncnorm.ppf(u, -1.5, 0.5, 40, 2)), list(stats.loguniform.ppf(u, 0.1, 10)), list(np.arccos(np.cos(0.5) - u * (np.cos(0.5) - np.cos(1.2))))]))`;
    const theirs = pythonJson(code, [], JSON.stringify(cube)) as number[][];
    const priors = [
      parameter({ kind: 'normal', mean: 40, sigma: 2 }), parameter({ kind: 'normal', mean: 40, sigma: 2 }, [37, 41]),
      parameter({ kind: 'logUniform', low: 0.1, high: 10 }), parameter({ kind: 'isotropic', low: 0.5, high: 1.2 }),
    ];
    priors.forEach((prior, k) =>
      // Tails by Newton on 1 + erf: 1e-16 of share at a density of 5e-6.
      cube.forEach((u, j) => expect(Math.abs(valuesFromCube([prior], [u])[0] / theirs[k][j] - 1)).toBeLessThan(1e-10)));
  });

  it('normalQuantile reverses normalShare, and ends where doubles do', () => {
    for (const x of [-5, -1.3, 0, 0.2, 4]) expect(Math.abs(normalQuantile(normalShare(x)) - x)).toBeLessThan(1e-9);
    expect([normalQuantile(0), normalQuantile(1)]).toEqual([-8.2, 8.2]);
  });

  it('isotropic has a scale of its own', () => {
    const inclination = parameter({ kind: 'isotropic', low: 20 * rad, high: 80 * rad }, [0, Math.PI]);
    const scaled = scaledFromValue(inclination, 50 * rad);
    expect(Math.abs(valueFromScaled(inclination, scaled) - 50 * rad)).toBeLessThan(1e-14);
    const slope = (valueFromScaled(inclination, scaled + 1e-5) - valueFromScaled(inclination, scaled - 1e-5)) / 2e-5;
    // Central difference.
    expect(Math.abs(slopeFromScaled(inclination, scaled) / slope - 1)).toBeLessThan(1e-8);
    expect(logPriorScaled([inclination], [1.01])).toBe(-Infinity);
    expect(logPriorScaled([parameter({ kind: 'normal', mean: 0, sigma: 3 }), inclination], [2, 0.5])).toBe(-2);
  });
});

describe('ties, derived numbers and nuisances of a study', () => {
  const scene = parseScene(readFileSync('scenes/lantern-wheel/cored-quadrupole.scene.yaml', 'utf8'), 'a.scene.yaml');
  const study = (lines: string): string => `gyrelight-study: 1
data:
  - {quantity: Q, file: q.fits, noise: 20 uJy/beam}
hypotheses:
  - name: one
    scene: a.scene.yaml
    free: {field.halo.strength: [0 uG, 6 uG]}
${lines}`;

  it('a tie follows what is free, in shown units', () => {
    const [hypothesis] = parseStudy(study('    tied: {field.disc.pitch: {formula: "-5*s - pi*0", where: {s: field.halo.strength}}}\n    derived: {ratio: {formula: "s/d", where: {s: field.halo.strength, d: field.disc.strength}, unit: ""}}\n'), 'a.study.yaml').hypotheses;
    const changed = followTies(sceneWith(scene, ['field.halo.strength'], [3]), hypothesis.tied.map((tie) => compileTie(tie, scene)));
    // deg, though angles are rad inside: one rounding each way.
    expect(Math.abs(shownValue(changed, 'field.disc.pitch') + 15)).toBeLessThan(1e-12);
    const ratio = 3 / shownValue(scene, 'field.disc.strength');
    expect(Math.abs(compileTie(hypothesis.derived[0], scene).value(changed) / ratio - 1)).toBeLessThan(1e-15);
  });

  it.each([
    ['both free and tied', '    tied: {field.halo.strength: {formula: "2"}}\n', /both free and tied/],
    ['an unknown name', '    tied: {field.disc.pitch: {formula: "2*t", where: {s: field.halo.strength}}}\n', /unknown name "t"/],
    ['an unknown path', '    tied: {field.disc.pitch: {formula: "2*s", where: {s: field.hallo.strength}}}\n', /field\.hallo\.strength/],
  ])('refuses %s', (_, lines, message) => {
    expect(() => parseStudy(study(lines), 'a.study.yaml').hypotheses[0].tied.map((tie) => compileTie(tie, scene))).toThrow(message);
  });

  it('the foreground is a nuisance unless held fixed or already named', () => {
    const place = { file: 'a' };
    expect(foregroundNuisance('default', scene, [], place)).toMatchObject({ path: 'observation.foreground.depth', kind: 'normal' });
    expect(foregroundNuisance('default', scene, ['observation.foreground.depth'], place)).toBeUndefined();
    expect(parseStudy(study('foreground: fixed\n'), 'a').foreground).toBeUndefined();
    expect(parseStudy(study(''), 'a').foreground).toBe('default');
    expect(parseStudy(study('foreground: {normal: [5 rad/m^2, 2 rad/m^2]}\n'), 'a').foreground).toMatchObject({ kind: 'normal', values: [{ text: '5 rad/m^2' }, {}] });
  });

  it('a calibration factor multiplies the maps of its band only', async () => {
    const bands = [1.4e9, 4.8e9].map((frequencyHz) => ({ name: `${frequencyHz / 1e9} GHz`, channels: [{ frequencyHz, widthHz: 0 }] }));
    const { calibration } = parseStudy(study('calibration: {1.4 GHz: {normal: [1, 0.05]}}\n'), 'a');
    const parameters = calibrationParameters(calibration, bands);
    expect(parameters).toMatchObject([{ path: 'calibration.1.4 GHz', calibrationBand: 0, start: 1 }]);
    const planes = [0, 1].map((band) => ({ quantity: 'Q' as const, band, channel: 0, values: new Float64Array(1), noise: 1 }));
    const model = withCalibration(async () => [Float64Array.of(2), Float64Array.of(3)], { planes }, parameters);
    expect(await model(Float64Array.of(1.1))).toEqual([Float64Array.of(2.2), Float64Array.of(3)]);
    expect(() => calibrationParameters(parseStudy(study('calibration: {9 GHz: {normal: [1, 0.05]}}\n'), 'a').calibration, bands)).toThrow(/no band of the data is near 9 GHz; there are 1.4 GHz, 4.8 GHz/);
  });
});
