import { describe, expect, test } from 'vitest';
import { parseScene } from '../../src/scene/parse-scene.ts';
import { fullScene, messageOf, referenceScenes, referenceText, spoil } from './support.ts';

const parse = (text: string) => parseScene(text, 's.yaml');

describe('reference scenes', () => {
  test.each(referenceScenes)('%s parses', (name) => {
    const scene = parseScene(referenceText(name), `${name}.yaml`);
    expect(scene.observation.bands[0].channels.map(({ frequencyHz }) => frequencyHz)).toEqual([0.35e9, 1.4e9, 2.3e9, 4.8e9]);
    expect(scene.galaxy.distanceKpc).toBe(10000);
    expect(scene.observation.noise).toBeUndefined();
  });

  test('b keeps what its text says', () => {
    const scene = parse(referenceText('b-bisymmetric-clockwise'));
    const [mode, halo] = scene.field;
    expect(mode.parameters).toMatchObject({ mode: 1, strength: 6, radius: 9, innerRadius: 1.5, height: 0.8, reference: 5 });
    // One rounding of deg -> rad.
    expect(Math.abs(mode.parameters.pitch / ((-15 * Math.PI) / 180) - 1)).toBeLessThan(4e-16);
    expect(halo.choices).toEqual({ parity: 'odd' });
    expect(scene.turbulence).toEqual({ unresolved: { rmsUG: 4, cellKpc: 0.05 } });
    expect(scene.observation.foregroundDepth).toBe(-18);
    expect(scene.cosmicRays.layers[0].parameters.density).toBe(1e-5);
  });
});

describe('the full scene', () => {
  const scene = parse(fullScene.join('\n'));

  test('galaxy, turbulence, numerics', () => {
    expect(scene.galaxy).toMatchObject({ distanceKpc: 10000, volume: { radiusKpc: 15, heightKpc: 6 }, centre: { raDeg: 150, decDeg: -20 } });
    expect(scene.turbulence.unresolved).toEqual({ rmsUG: 4, cellKpc: 0.05, follows: 'warm' });
    expect(scene.numerics).toEqual({ tolerance: 1e-5, seed: 7, bits: 64 });
  });

  test('component names default to their models', () => {
    expect(scene.field.map(({ name }) => name)).toEqual(['uniform', 'halo', 'toroidal-halo', 'mine']);
    expect(scene.field[0].parameters).toEqual({ x: 1, y: 0, z: 0.5 });
  });

  test('inline formulas become a model', () => {
    const { model, parameters } = scene.field[3];
    expect(parameters).toEqual({ q: 20, a: 0.3 });
    expect(model).toMatchObject({ name: 'formula mine', kind: 'field', formulas: { potential: { phi: 'q*r/(r^2 + z^2 + a^2)' } } });
    expect(model.parameters.map(({ name, unit }) => [name, unit])).toEqual([['q', 'uG kpc^2'], ['a', 'kpc']]);
    expect(model.edges).toEqual({ z: ['1.5', '2*a'] });
  });

  test('layers: C and the height law', () => {
    const [layer] = scene.cosmicRays.layers;
    expect(layer).toMatchObject({ name: 'thick', heightIndex: 0.25, heightAtHz: 1.4e9 });
    expect(layer.parameters).toEqual({ density: 1e-5, radius: 6, height: 1.5 });
  });

  test('bands: centres from + (k + 1/2) width, averaged over the width; lists (physics.md section 5)', () => {
    const [l, c, x] = scene.observation.bands;
    expect(l.centreHz).toBe(1.5e9);
    // from and to are rounded numbers of Hz, so the centres are exact to a rounding of 1e9.
    l.channels.forEach(({ frequencyHz, widthHz }, k) => {
      expect(Math.abs(frequencyHz - (1.35e9 + k * 1e8))).toBeLessThan(1e-6);
      expect(Math.abs(widthHz - 1e8)).toBeLessThan(1e-6);
    });
    expect(c).toEqual({ name: 'C', channels: [{ frequencyHz: 4.8e9, widthHz: 1e8 }], centreHz: 4.8e9 });
    expect(x).toEqual({ name: 'X', channels: [{ frequencyHz: 8e9, widthHz: 0 }, { frequencyHz: 8.4e9, widthHz: 0 }] });
  });

  test('image, beam, noise', () => {
    expect(scene.observation.image).toEqual({ nx: 64, ny: 32, pixelArcsec: 4 });
    expect(scene.observation.beam).toMatchObject({ majorArcsec: 15, minorArcsec: 12 });
    expect(scene.observation.noise).toBe(1e-5);
  });

  test('defaults', () => {
    const { numerics, observation } = parse(referenceText('a-spiral-quadrupole'));
    expect(numerics).toEqual({ tolerance: 1e-4, seed: 1, bits: 32 });
    // 1 kpc at 10 Mpc is 1e-4 rad = 20.6264806 arcsec (648000/pi arcsec a radian).
    expect(Math.abs(observation.image.pixelArcsec / (64.8 / Math.PI) - 1)).toBeLessThan(1e-15);
    expect(observation.image.pixelKpc).toBe(1);
    expect(parse(spoil(28, '  beam: {major: 15 arcsec, minor: 15 arcsec}')).observation.beam).toEqual({ majorArcsec: 15, minorArcsec: 15, angle: 0 });
    expect(parse(spoil(29, '').replace(/^.*beam:.*$/m, '  noise: 2 MJy/sr')).observation.noise).toBe(2e6);
  });

  // Inside formulas lengths are kpc, and an edge is a formula: a bare number is kpc there.
  test('edges as bare numbers, in kpc', () => {
    const text = spoil(13, '  - {model: formula, name: mine, field: {x: "1"}, edges: {z: [0.5, -0.5], r: ["500 pc"]}}');
    expect(parse(text).field.find(({ name }) => name === 'mine')?.model.edges).toEqual({ z: ['0.5', '-0.5'], r: ['0.5'] });
  });

  test('a density by formula, with definitions and cylindrical edges', () => {
    const text = spoil(15, '  - {model: formula, name: warm, parameters: {density: 0.02 cm^-3, h: 1 kpc}, define: {u: "z/h"}, density: "abs(u) < 1 ? density : 0", edges: {z: [h, -h], r: [500 pc]}}');
    expect(parse(text).thermalElectrons[0].model).toMatchObject({ kind: 'density', define: { u: 'z/h' }, edges: { z: ['h', '-h'], r: ['0.5'] } });
  });
});

describe('what is refused, word for word', () => {
  test.each<[number, string, string]>([
    [1, 'gyrelight: 2', '1:12: gyrelight: 2 is a newer file format than this version can read (it reads 1)'],
    [1, '', '2:1: "gyrelight: 1" is missing'],
    [2, 'titel: Everything', '2:1: unknown key "titel" (did you mean "title"?); allowed are gyrelight, title, galaxy, field, thermalElectrons, cosmicRays, turbulence, freeFree, dust, zeeman, observation, numerics'],
    [2, 'freeFree: {temperature: 10 K}', '2:25: freeFree.temperature: "10 K" is outside 100 to 1000000000 K'],
    [2, 'title: [1', '3:1: not valid YAML: Flow sequence in block collection must be sufficiently indented and end with a ]'],
    [4, '  distance: 10 uG', '4:13: galaxy.distance: "10 uG" is a magnetic field: a length is wanted, such as "2 Mpc"'],
    [4, '  distance: 10', '4:13: galaxy.distance: 10 has no unit: a length is wanted, such as "2 Mpc"'],
    [4, '  distance: .nan', '4:13: galaxy.distance: NaN is given where a length is wanted, such as "2 Mpc" (0.001 to 100000 Mpc)'],
    [4, '  distance: NaN Mpc', '4:13: galaxy.distance: "NaN Mpc" is not a finite number'],
    [4, '  distance: 10 Mpc\n  distance: 11 Mpc', '5:3: the key "distance" is given twice'],
    [5, '  inclination: 180.1 deg', '5:16: galaxy.inclination: "180.1 deg" is outside 0 to 180 deg'],
    [5, '', '4:3: galaxy.inclination is missing: an angle is wanted, such as "2 deg" (0 to 180 deg)'],
    [7, '  volume: {radius: 0 kpc, height: 6 kpc}', '7:20: galaxy.volume.radius: "0 kpc" is not allowed: more than 0 and at most 1000 kpc'],
    [10, '  - {model: unifrom, x: 1 uG, y: 0 uG, z: 0 uG}', '10:13: unknown model "unifrom" (did you mean "uniform"?); models are '],
    [10, '  - {model: sech2-disc, density: 1 cm^-3, radius: 1 kpc, height: 1 kpc}', '10:13: the model "sech2-disc" is a density, but a field is wanted; those are '],
    [10, '  - {model: turbulence, rms: 4 uG}', '10:13: turbulence is no component: it is given as turbulence.resolved'],
    [10, '  - {x: 1 uG}', '10:5: field, item 1, model is missing: the name of a model is wanted'],
    [10, '  - uniform', '10:5: field, item 1: "uniform" is given where a component is wanted, such as {model: uniform, x: 1 uG, y: 0 uG, z: 0 uG}'],
    [11, '  - {model: quadrupole-halo, name: halo, strength: 2 uG, core: 2 kpc}', '11:5: field.halo.reference is missing: a length is wanted, such as "2 kpc" (0.001 to 1000 kpc)'],
    [11, '  - {model: quadrupole-halo, name: halo, strength: 2 uG, core: 2 kpc, reference: 5 kpc, arms: 2}', '11:95: field.halo.arms: 2 is given where a group of the keys number, pitch, width, amplitude, phase, reference, innerRadius is wanted'],
    [11, '  - {model: quadrupole-halo, name: halo, strength: 2 uG, cor: 2 kpc, reference: 5 kpc}', '11:58: field.halo: unknown key "cor" (did you mean "core"?); allowed are model, name, strength, core, reference, arms, flare, hole'],
    [11, '  - {model: quadrupole-halo, name: halo, strength: 2000 uG, core: 2 kpc, reference: 5 kpc}', '11:52: field.halo.strength: "2000 uG" is outside -1000 to 1000 uG'],
    [11, '  - {model: uniform, x: 1 uG, y: 0 uG, z: 0 uG}', '11:5: two components of field are named "uniform": give one of them another "name"'],
    [11, '  - {model: uniform, name: a.b, x: 1 uG, y: 0 uG, z: 0 uG}', '11:28: field.a.b.name: "a.b" is no name: a letter, then letters, digits, - or _ are wanted, 60 at most'],
    [12, '  - {model: toroidal-halo, strength: 2 uG, radius: 7 kpc, innerRadius: 1 kpc, peakHeight: 1.5 kpc, width: 1 kpc, parity: od}', '12:122: field.toroidal-halo.parity: "od" is not allowed: parity is one of even, odd (did you mean "odd"?)'],
    [12, '  - {model: axisymmetric-spiral, strength: 8 uG, pitch: -20 deg, radius: 8 kpc, innerRadius: 1 kpc, height: 0.6 kpc, closure: 4 kpc, pitchSlope: 1 deg/kpc}', '12:5: "pitchSlope" is given without "pitchReference": pitchSlope, pitchReference (varying pitch) go together or not at all'],
    [12, '  - {model: spiral-mode, mode: 1.5, strength: 6 uG, pitch: -15 deg, radius: 9 kpc, innerRadius: 1.5 kpc, height: 0.8 kpc, reference: 5 kpc, phase: 40 deg}', '12:32: field.spiral-mode.mode: 1.5 is not allowed: a whole number, 1 to 20'],
    [13, '  - {model: formula, name: mine, parameters: {q: 20 uG kpc^2}, potential: {phi: "q*r/(r^2 + a^2)"}}', '13:93: formula "q*r/(r^2 + a^2)", character 12: unknown name "a"'],
    [13, '  - {model: formula, name: mine, potential: {phi: "alert(1)"}}', '13:52: formula "alert(1)", character 1: '],
    [13, '  - {model: formula, name: mine, parameters: {q: 20 parsecs}, potential: {phi: "q*r"}}', '13:50: unknown unit "parsecs"'],
    [13, '  - {model: formula, name: mine, parameters: {pi: 20 kpc}, potential: {phi: "pi*r"}}', '13:51: the name "pi" already means something else in formulas'],
    [13, '  - {model: formula, name: mine, parameters: {q: 20}, density: "q"}', '13:64: a field has no "density": give "potential", "euler" or "field"'],
    [13, '  - {model: formula, name: mine, field: {x: "1"}, edges: {z: [2 uG]}}', '13:63: "2 uG" is a magnetic field: a length is wanted, such as "2 kpc"'],
    [13, '  - {model: formula, name: mine, field: {x: "1"}, edges: {z: [r]}}', '13:63: the edge "r" is no formula of parameters alone'],
    [13, '  - {model: formula, name: mine, field: {x: "1"}, heightIndex: 1, heightAt: 1 GHz}', '13:51: field.mine: unknown key "heightIndex"'],
    [17, '  index: 1', '17:10: cosmicRays.index: 1 is not allowed: more than 1 and at most 5'],
    [17, '  index: 2.8\n  equipartition: {protonRatio: 100}', '18:18: cosmicRays: "layers" and "equipartition" are given: one of them is wanted'],
    [17, '  index: 2.8\n  scaleTo: {flux: 1 Jy}', '18:12: cosmicRays.scaleTo.at is missing: a frequency is wanted, such as "2 GHz" (0.001 to 1000 GHz)'],
    [19, '    - {model: exponential-disc, density: 1e-5 cm^-3, radius: 6 kpc, height: 1.5 kpc}', '19:33: cosmicRays.layers.exponential-disc: unknown key "density"'],
    [19, '    - {model: exponential-disc, normalisation: 1e-5 cm^-3, radius: 6 kpc, height: 1.5 kpc, heightAt: 1.4 GHz}', '19:92: "heightAt" is given without "heightIndex": both or neither'],
    [19, '    - {model: slab, normalisation: 1e-5 cm^-3, halfThickness: 1 kpc, heightIndex: 0.25, heightAt: 1.4 GHz}', '19:70: "heightIndex" needs a model with the parameter "height"; "slab" has none'],
    [21, '  resolved: {rms: 4 uG}', '21:13: turbulence.resolved.outerScale is missing: a length is wanted, such as "2 kpc" (more than 0 and at most 1000 kpc)'],
    [21, '  unresolved: {rms: 4 uG, cell: 50 pc, follows: hot}', '21:49: turbulence.unresolved.follows: nothing is named "hot"'],
    [21, '  unresolved: {rms: 4 uG, cell: 50 pc, follows: mine}', '21:49: turbulence.unresolved.follows: "mine" has neither "strength" nor "density" to divide by'],
    [21, '  unresolved: {rms: -4 uG, cell: 50 pc}', '21:21: turbulence.unresolved.rms: "-4 uG" is outside 0 to 10000 uG'],
    [23, '  image: {pixels: 1e9, pixel: 4 arcsec}', '23:19: observation.image.pixels: 1000000000 is not allowed: a whole number, 1 to 16384'],
    [23, '  image: {pixels: many, pixel: 4 arcsec}', '23:19: observation.image.pixels: "many" is given where a number of pixels n, or [nx, ny], is wanted'],
    [23, '  image: {pixels: 64, pixel: 4 uG}', '23:30: observation.image.pixel: "4 uG" is a magnetic field: an angle such as "2 arcsec" or a length such as "2 kpc" is wanted'],
    [23, '  image: {pixels: 640, pixel: 5 arcmin}', '23:31: the image is 53.3 deg wide; at most 20 deg are allowed'],
    [25, '    - {name: L, from: 1.3 GHz, to: 1.7 GHz}', '25:7: band "L": "channels" missing: give "from", "to" and "channels", or "at"'],
    [25, '    - {name: L, from: 1.7 GHz, to: 1.3 GHz, channels: 4}', '25:32: band "L": from 1.7 GHz is not below to 1.3 GHz'],
    [25, '    - {name: L, from: 1.3 GHz, to: 1.7 GHz, channels: 4, at: [1 GHz]}', '25:17: band "L": "from" and "at" exclude each other'],
    [25, '    - {name: L, from: 1.3 GHz, to: 1.7 GHz, channels: 65536}', '26:7: band "C": with it the scene has 65537 channels; at most 65536 are allowed'],
    [26, '    - {name: l, at: [4.8 GHz]}', '26:8: band "l": the name is taken by band "L" (capitals do not count)'],
    [26, '    - {name: C, at: [4.8 GHz], width: 10 GHz}', '26:32: band "C": the width 10 GHz reaches below zero frequency'],
    [28, '  beam: {major: 12 arcsec, minor: 15 arcsec, angle: 0 deg}', '28:35: the minor axis of the beam, 15 arcsec, is larger than its major axis, 12 arcsec'],
    [28, '  beam: {major: 15 arcsec, minor: 12 arcsec}', '28:9: observation.beam.angle is missing: an elliptical beam needs it'],
    [28, '', '29:10: noise is 0.00001 Jy/beam, but there is no beam: give a beam, or noise in Jy/sr'],
    [29, '  noise: 10 Jy/sr', '29:10: noise is 10 Jy/sr, but there is a beam: give it in Jy/beam'],
    [29, '  noise: 10 K', '29:10: observation.noise: "10 K" is a temperature: a brightness per beam such as "2 Jy/beam" or a surface brightness such as "2 Jy/sr" is wanted'],
    [30, '  foreground: {depth: 1 rad}', '30:23: observation.foreground.depth: "1 rad" is an angle: a Faraday depth is wanted, such as "2 rad/m^2"'],
    [31, 'numerics: {tolerance: 1}', '31:23: numerics.tolerance: 1 is outside 1e-12 to 0.1'],
    [31, 'numerics: {seed: -1}', '31:18: numerics.seed: -1 is not allowed: a whole number, 0 to 1000000000000000'],
    [31, 'numerics: {bits: 16}', '31:18: numerics.bits: 16 is not allowed: bits is 32 or 64'],
  ])('line %d as %s', (line, text, message) => {
    const given = messageOf(() => parse(spoil(line, text)));
    // Messages that end in a long list are compared up to there.
    const complete = !/(; models are |; those are |character 1: |name "a"|"parsecs"|"heightIndex"|key "density"|named "hot")$/.test(message);
    expect(complete ? given : given.slice(0, `s.yaml:${message}`.length)).toBe(`s.yaml:${message}`);
  });

  test('a study is not a scene', () => {
    expect(messageOf(() => parse('gyrelight-study: 1\ntitle: t'))).toBe('s.yaml:1:1: "gyrelight: 1" is missing; this file says "gyrelight-study", so it is of another kind');
  });

  test('follows may not be ambiguous', () => {
    const text = spoil(15, '  - {model: exponential-disc, name: thick, density: 0.03 cm^-3, radius: 10 kpc, height: 1 kpc}').replace('follows: warm', 'follows: thick');
    expect(messageOf(() => parse(text))).toBe('s.yaml:21:49: turbulence.unresolved.follows: "thick" fits 2 components: give them different names');
  });
});
