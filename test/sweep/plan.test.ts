import { describe, expect, it } from 'vitest';
import { makeDesign, pointCount, rowCount } from '../../src/sweep/design.ts';
import { columnsOf, unitAt, unitCount } from '../../src/sweep/evaluate.ts';
import { parseSweep } from '../../src/sweep/parse-sweep.ts';
import { planSweep, sceneAt } from '../../src/sweep/plan.ts';
import { changesBetween, identityOf } from '../../src/sweep/source.ts';
import { InputError } from '../../src/units/input-error.ts';
import { smallScene } from '../cli/run.ts';
import { smallPlan } from './sweeps.ts';

const degree = Math.PI / 180;

describe('sweep files', () => {
  it.each([
    ['vary: {galaxy.inclinaton: [20 deg]}', 'x.sweep.yaml:3:28: galaxy: unknown key "inclinaton" (did you mean "inclination"?)'],
    ['vary: {galaxy.inclination: [20 deg, 20 kpc]}', 'x.sweep.yaml:3:37: "20 kpc" is a length: an angle is wanted'],
    ['vary: {galaxy.inclination: [20 deg, 200 deg]}', 'x.sweep.yaml:3:37: galaxy.inclination: 200 deg is outside 0 to 180 deg'],
    ['vary: {galaxy.inclination: {from: 20 deg, to: 10 deg, steps: 3}}', 'x.sweep.yaml:3:35: galaxy.inclination: the range from 20 deg to 10 deg is empty'],
    ['vary: {galaxy.inclination: {from: 20 deg, to: 40 deg}}', 'x.sweep.yaml:3:8: galaxy.inclination: a range of a grid needs `steps`'],
    ['vary: {galaxy.inclination: [20 deg, 20 deg]}', 'x.sweep.yaml:3:37: galaxy.inclination: 20 deg is listed twice'],
    ['vary: {galaxy.inclination: {from: 0 deg, to: 9 deg, steps: 3, spacing: log}}', 'x.sweep.yaml:3:35: galaxy.inclination: spacing log from 0 deg; allowed: above 0'],
    ['vary: {field.halo.core: {from: 1 kpc, to: 3 kpc, steps: 3, spacing: cos}}', 'spacing cos is for angles between 0 and 180 deg'],
    ['vary: {galaxy.inclination: {from: 0 deg, to: 9 deg, step: 3}}', 'x.sweep.yaml:3:53: vary.galaxy.inclination: unknown key "step" (did you mean "steps"?)'],
    ['vary: {galaxy.inclination: [20 deg]}\ndesign: sobol', '`design: sobol` needs `samples`'],
    ['vary: {galaxy.inclination: [20 deg]}\nsamples: 8', '`samples` means nothing for a grid'],
    ['vary: {galaxy.inclination: [20 deg]}\nmeasure: [asymetry]', 'measure is one of asymmetry, harmonics'],
    ['vary: {galaxy.inclination: [20 deg]}\nheatMap: [galaxy.inclination, field.halo.core]', '"field.halo.core" is not varied'],
    ['vary: {galaxy.inclination: [20 deg]}\nnoise: 3 kpc', '3 kpc'],
    ['vary: {galaxy.inclination: [20 deg]}\nring: [7 kpc, 4 kpc]', 'the inner radius comes first'],
    ['vary: {}', 'nothing is varied'],
    ['vary: {field.halo.parity: [even, odd]}', 'parity'],
    ['vary: {galaxy.inclination: [20 deg]}\nscenes: {a: s.yaml}', 'a sweep needs `scene`, or `scenes`'],
  ])('refuse %s', (body, message) => {
    let said = '';
    try {
      smallPlan(body);
    } catch (error) {
      expect(error).toBeInstanceOf(InputError);
      said = (error as InputError).message;
    }
    expect(said).toContain(message);
  });

  it('refuse measures that a scene cannot have, in words', () => {
    const bare = smallScene.replace(/ {2}noise: .*\n/, '');
    const one = 'vary: {galaxy.inclination: [20 deg]}\n';
    expect(() => smallPlan(`${one}measure: [detectability]`, bare)).toThrow(/detectability needs noise/);
    expect(() => smallPlan(`${one}realisations: 3`, bare)).toThrow(/would all be the same/);
    const single = bare.replace(/bands:[\s\S]*?beam/, 'bands: [{name: C, at: [4.8 GHz]}]\n  beam');
    expect(() => smallPlan(`${one}measure: [gradient]`, single)).toThrow(/need two frequencies/);
    expect(() => smallPlan(`${one}measure: [depolarization]`, single)).toThrow(/between bands/);
  });
});

describe('designs', () => {
  it('a grid has every combination, equal steps of the angle, its logarithm or its cosine', () => {
    const plan = smallPlan('vary: {galaxy.inclination: {from: 0 deg, to: 90 deg, steps: 3, spacing: cos}, field.halo.core: {from: 1 kpc, to: 4 kpc, steps: 3, spacing: log}, field.halo.strength: [1 uG, 2 uG]}');
    expect(pointCount(plan)).toBe(18);
    const points = Array.from({ length: 18 }, (_, k) => [...makeDesign(plan)(k).values]);
    expect(points[0]).toEqual([0, 1, 1]);
    expect(points[17]).toEqual([90 * degree, 4, 2]);
    // Halfway in the cosine from 0 to 90 deg lies 60 deg; in the logarithm from 1 to 4 lies 2. Rounding of arccos and powers.
    expect(Math.abs(points[8][0] / (60 * degree) - 1)).toBeLessThan(1e-15);
    expect(Math.abs(points[8][1] / 2 - 1)).toBeLessThan(1e-15);
    expect(new Set(points.map(String)).size).toBe(18);
    expect(sceneAt(plan, 0, points[8]).galaxy.inclination).toBe(points[8][0]);
  });

  it('Sobol points with cosine spacing are isotropic: cos i is uniform', () => {
    const plan = smallPlan('vary: {galaxy.inclination: {from: 0 deg, to: 90 deg, spacing: cos}}\ndesign: sobol\nsamples: 256');
    const cosines = Array.from({ length: 256 }, (_, k) => Math.cos(makeDesign(plan)(k).values[0]));
    // A net of 256 points: one in every 1/256 of the range.
    expect(new Set(cosines.map((cosine) => Math.min(255, Math.floor(cosine * 256)))).size).toBe(256);
  });

  it('a sensitivity design mixes A and B one axis at a time', () => {
    const plan = smallPlan('vary: {galaxy.inclination: {from: 10 deg, to: 80 deg}, field.halo.core: [1 kpc, 2 kpc, 3 kpc]}\ndesign: sensitivity\nsamples: 8');
    expect(pointCount(plan)).toBe(32);
    const design = makeDesign(plan);
    for (let n = 0; n < 8; n++) {
      const [A, B, first, second] = [0, 1, 2, 3].map((k) => [...design(4 * n + k).values]);
      expect(first).toEqual([B[0], A[1]]);
      expect(second).toEqual([A[0], B[1]]);
    }
  });

  it('words make variants of the scene, and several scenes too', () => {
    const flared = smallScene.replace('{model: quadrupole-halo, name: halo, strength: 2 uG, core: 3 kpc, reference: 5 kpc}', '{model: flared-halo, name: halo, strength: 2 uG, radius: 8 kpc, smoothing: 1 kpc, openingAngle: 30 deg, turnover: 3 kpc, parity: even}');
    const sweep = parseSweep('gyrelight-sweep: 1\nscenes: {a: a.yaml, b: b.yaml}\nvary: {field.halo.parity: [even, odd], galaxy.inclination: [20 deg, 40 deg]}', 'x.sweep.yaml');
    const plan = planSweep(sweep, [{ file: 'a.yaml', text: flared }, { file: 'b.yaml', text: flared }], []);
    expect(plan.variants.map(({ name }) => name)).toEqual(['a, field.halo.parity even', 'a, field.halo.parity odd', 'b, field.halo.parity even', 'b, field.halo.parity odd']);
    expect(plan.axes.map(({ path }) => path)).toEqual(['galaxy.inclination']);
    expect(pointCount(plan)).toBe(8);
    expect(makeDesign(plan)(7)).toEqual({ variant: 3, values: Float64Array.of(40 * degree) });
  });

  it('units cover every row once', () => {
    const plan = smallPlan('vary: {galaxy.inclination: [20 deg, 40 deg, 60 deg]}\nrealisations: 70');
    const rows = Array.from({ length: unitCount(plan) }, (_, k) => unitAt(plan, k)).flatMap(({ point, from, to }) => Array.from({ length: to - from }, (_, k) => 70 * point + from + k));
    expect(rows).toEqual(Array.from({ length: rowCount(plan) }, (_, k) => k));
  });
});

describe('what makes a sweep the same', () => {
  const base = 'vary: {galaxy.inclination: {from: 10 deg, to: 80 deg, steps: 8}}\n';
  const identity = (body: string, scene?: string): ReturnType<typeof identityOf> => identityOf(smallPlan(body, scene), '1');

  it.each([
    ['vary: {galaxy.inclination: {from: 10 deg, to: 80 deg, steps: 9}}', ['vary.galaxy.inclination']],
    [`${base}realisations: 2`, ['realisations']],
    [`${base}noise: 3 uJy/beam`, ['scene 1, s.yaml']],
    [`${base}measure: [asymmetry]`, ['measure']],
    [`${base}seed: 5`, []],
    [`${base}title: another`, []],
  ])('%s', (body, changed) => expect(changesBetween(identity(base), identity(body))).toEqual(changed));

  it('a comment or the title of the scene changes nothing, a number does', () => {
    expect(changesBetween(identity(base), identity(base, `# a comment\n${smallScene.replace('A small scene', 'Another title')}`))).toEqual([]);
    expect(changesBetween(identity(base), identity(base, smallScene.replace('core: 3 kpc', 'core: 3.1 kpc')))).toEqual(['scene 1, s.yaml']);
  });

  it('columns are named once each', () => {
    const names = columnsOf(smallPlan(`${base}measure: [asymmetry, harmonics, polarization, depolarization, gradient, origin-height, detectability]`)).map(({ name }) => name);
    expect(new Set(names).size).toBe(names.length);
    expect(names).toContain('depolarization_low_error');
    expect(names).not.toContain('depolarization_high');
  });
});
