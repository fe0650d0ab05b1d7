import { describe, expect, it } from 'vitest';
import { resolveFree } from '../../src/infer/free-parameters.ts';
import { parseStudy } from '../../src/infer/study.ts';
import { parseScene } from '../../src/scene/parse-scene.ts';

const sample = `gyrelight-study: 1
title: Which halo?
data:
  - {quantity: Q, file: q.fits, noise: 20 uJy/beam}
  - quantity: U
    files: [u1.fits, u2.fits]
    noiseMap: rms.fits
    frequency: 1.4 GHz
    width: 20 MHz
    beam: {major: 15 arcsec, minor: 12 arcsec, angle: 30 deg}
    mask: m.fits
    zeroLevel: 5 uJy/beam
    convention: U-reversed
    angleOf: B
    correlation: 20 arcsec
hypotheses:
  - name: cored quadrupole
    scene: quadrupole.scene.yaml
    free:
      field.halo.strength: [0 uG, 6 uG]
      galaxy.inclination: {normal: [40 deg, 2 deg]}
      field.halo.core: {logUniform: [100 pc, 3 kpc]}
      cosmicRays.index: [2.2, 3]
  - {name: nothing free, scene: other.scene.yaml}
method: least-squares
`;

/** The sample with one text in place of another, which must be there. */
function changed(from: string, to: string): string {
  expect(sample).toContain(from);
  return sample.replace(from, to);
}

const parse = (text: string) => parseStudy(text, 'a.study.yaml');

describe('parseStudy', () => {
  it('reads every key', () => {
    const study = parse(sample);
    expect(study.data[0]).toMatchObject({ quantity: 'Q', files: ['q.fits'], noise: { text: '20 uJy/beam' } });
    expect(study.data[0].convention).toBeUndefined();
    expect(study.data[1]).toMatchObject({
      quantity: 'U', files: ['u1.fits', 'u2.fits'], noiseMap: 'rms.fits', frequencyHz: 1.4e9, widthHz: 2e7, mask: 'm.fits',
      zeroLevel: { text: '5 uJy/beam', place: { file: 'a.study.yaml', line: 12, column: 16 } },
      convention: 'U-reversed', angleOf: 'B', correlationArcsec: 20,
    });
    expect(study.data[1].beam).toEqual({ majorArcsec: 15, minorArcsec: 12, angle: Math.PI / 6 });
    expect(study.hypotheses[0].free.map(({ path, kind, values }) => [path, kind, ...values.map(({ text }) => text)])).toEqual([
      ['field.halo.strength', 'uniform', '0 uG', '6 uG'],
      ['galaxy.inclination', 'normal', '40 deg', '2 deg'],
      ['field.halo.core', 'logUniform', '100 pc', '3 kpc'],
      ['cosmicRays.index', 'uniform', '2.2', '3'],
    ]);
    expect(study.hypotheses[1].free).toEqual([]);
    expect(study).toMatchObject({ title: 'Which halo?', method: 'least-squares', seed: 1 });
  });

  const wrong: [string, string, string, RegExp][] = [
    ['a misspelt key', 'noise: 20 uJy/beam', 'noize: 20 uJy/beam', /^a\.study\.yaml:4:\d+: .*unknown key "noize" \(did you mean "noise"\?\)/],
    ['an unknown method', 'method: least-squares', 'method: guess', /"guess" is not allowed: method is one of least-squares, walkers, nested/],
    ['an unknown quantity', 'quantity: Q', 'quantity: V', /"V" is not allowed: quantity is one of I, Q, U, P, chi, RM/],
    ['sources of P', '{quantity: Q, file: q.fits, noise: 20 uJy/beam}', '{quantity: P, sources: s.csv}', /:4:\d+: `sources` hold RM, not P/],
    ['a stray key', '{quantity: Q, file: q.fits, noise: 20 uJy/beam}', '{quantity: RM, sources: s.csv, noise: 3 rad/m^2}', /`noise` means nothing here; `sources` takes scatter/],
    ['a stray key of a map', 'file: q.fits, noise', 'file: q.fits, scatter: 3 rad/m^2, noise', /`scatter` means nothing for a map of Q/],
    ['a file and a table', '{quantity: Q, file: q.fits, noise: 20 uJy/beam}', '{quantity: P, file: p.fits, sectors: s.csv}', /needs one of `file`, `sectors`/],
    ['no file', 'file: q.fits, ', '', /:4:5: a data entry needs `file`, or `files`/],
    ['two noises', 'noise: 20 uJy/beam', 'noise: 20 uJy/beam, noiseMap: r.fits', /both given/],
    ['a unit that is none of a frequency', '1.4 GHz', '1.4 kpc', /:8:16: .*"1.4 kpc" is a length/],
    ['a convention of the trade', 'U-reversed', 'COSMO', /:13:17: .*"COSMO" is not allowed: convention is one of IAU, U-reversed/],
    ['a beam on its head', 'minor: 12 arcsec', 'minor: 16 arcsec', /:10:\d+: the beam's minor axis \(16 arcsec\) is longer/],
    ['signs of I', 'quantity: U', 'quantity: I', /:13:\d+: `convention` means nothing for I/],
    ['a prior of another kind', '{normal: [40 deg, 2 deg]}', '{gauss: [40 deg, 2 deg]}', /:21:\d+: .*\[low, high\], \{normal: \[mean, sigma\]\}/],
    ['a range of three', '[0 uG, 6 uG]', '[0 uG, 6 uG, 7 uG]', /:20:\d+: .*\[low, high\]/],
    ['a name twice', 'name: nothing free', 'name: cored quadrupole', /:24:\d+: two hypotheses are named "cored quadrupole"/],
    ['another kind of file', 'gyrelight-study: 1', 'gyrelight: 1', /"gyrelight-study: 1" is missing; this file says "gyrelight"/],
    ['no hypotheses', sample.slice(sample.indexOf('hypotheses:'), sample.indexOf('method')), '', /hypotheses is missing/],
  ];
  for (const [what, from, to, message] of wrong) {
    it(`refuses ${what}`, () => {
      expect(() => parse(changed(from, to))).toThrow(message);
      expect(() => parse(changed(from, to))).toThrow(/^a\.study\.yaml:\d+:\d+: /);
    });
  }
});

describe('resolveFree', () => {
  const scene = parseScene(
    `gyrelight: 1
galaxy: {distance: 10 Mpc, inclination: 40 deg, positionAngle: 25 deg, volume: {radius: 15 kpc, height: 6 kpc}}
field: [{model: quadrupole-halo, name: halo, strength: 2 uG, core: 2 kpc, reference: 5 kpc}, {model: spiral-mode, name: arms, mode: 2, strength: 1 uG, pitch: -20 deg, radius: 8 kpc, innerRadius: 1 kpc, height: 1 kpc, reference: 5 kpc, phase: 0 deg}]
cosmicRays: {index: 2.8, layers: [{model: slab, normalisation: 1e-5 cm^-3, halfThickness: 1 kpc}]}
observation: {image: {pixels: 9, pixel: 4 arcsec}, bands: [{name: L, at: [1.4 GHz]}]}
`,
    'a.scene.yaml',
  );
  const resolve = (text: string) => resolveFree(parse(text).hypotheses[0].free, scene);

  it('reads priors in the units of their paths', () => {
    const resolved = resolve(sample);
    expect(resolved.map(({ path, unit, shownUnit }) => [path, unit, shownUnit])).toEqual([
      ['field.halo.strength', 'uG', 'uG'], ['galaxy.inclination', 'rad', 'deg'], ['field.halo.core', 'kpc', 'kpc'], ['cosmicRays.index', '', ''],
    ]);
    const degree = Math.PI / 180;
    expect(resolved.map(({ prior }) => prior)).toEqual([
      { kind: 'uniform', low: 0, high: 6 },
      { kind: 'normal', mean: 40 * degree, sigma: 2 * degree },
      { kind: 'logUniform', low: 0.1, high: 3 },
      { kind: 'uniform', low: 2.2, high: 3 },
    ]);
    expect(resolved.map(({ start }) => start)).toEqual([2, 40 * degree, 2, 2.8]);
    expect(resolved[1].allowed).toEqual([0, Math.PI]);
  });

  it('keeps fits off ends that are not allowed themselves', () => {
    // p is above 1, 5 is allowed.
    const normal = resolve(changed('[2.2, 3]', '{normal: [2, 0.5]}'))[3];
    expect(normal.allowed[0]).toBe(1 + 5e-7);
    expect(normal.allowed[1]).toBe(5);
  });

  const wrong: [string, string, string, RegExp][] = [
    ['a path that is not there', 'field.halo.strength', 'field.halo.strenght', /^a\.study\.yaml:20:7: unknown path "field.halo.strenght" \(did you mean "field.halo.strength"/],
    ['a wrong unit', '0 uG', '0 kpc', /:20:29: "0 kpc" is a length/],
    ['a missing unit', '6 uG', '6', /:20:35: "6" has no unit/],
    ['a value the scene does not allow', '[2.2, 3]', '[2.2, 7]', /:23:31: cosmicRays.index: .*at most 5/],
    ['an end the scene does not allow', '[2.2, 3]', '[1, 3]', /:23:26: cosmicRays.index: .*more than 1/],
    ['an empty range', '[0 uG, 6 uG]', '[6 uG, 0 uG]', /:20:29: .*from 6 uG to 0 uG is empty/],
    ['a sigma of 0', '2 deg]', '0 deg]', /:21:45: .*sigma of 0 deg is given; allowed: above 0/],
    ['logUniform from 0', '100 pc', '0 pc', /:22:\d+: .*logUniform from 0 pc; allowed: above 0/],
    ['whole numbers', 'cosmicRays.index: [2.2, 3]', 'field.arms.mode: [1, 3]', /:23:7: field.arms.mode takes whole numbers only/],
  ];
  for (const [what, from, to, message] of wrong) {
    it(`refuses ${what}`, () => expect(() => resolve(changed(from, to))).toThrow(message));
  }
});
