import { readdirSync, readFileSync } from 'node:fs';
import { describe, expect, test } from 'vitest';
import { getModel, modelLibrary } from '../../src/model/library.ts';
import { parseModelFile } from '../../src/model/model-file.ts';
import { fillValues, internalUnit, valuesShape } from '../../src/model/parameters.ts';
import { InputError } from '../../src/units/input-error.ts';
import { keys } from '../../src/units/schema.ts';
import { checkYaml, readYaml } from '../../src/units/yaml-input.ts';

/** A right file, line by line, so that each test below spoils one line. */
const disc = [
  'name: disc',
  'kind: field',
  'title: Disc',
  'meaning: A disc for tests',
  'source: Own definition',
  'parameters:',
  '  strength: {unit: uG, range: [-100, 100], meaning: amplitude}',
  '  core: {unit: kpc, range: [0, 50], default: 2, meaning: core radius}',
  '  pitch: {unit: deg, range: [-90, 90], nonZero: true, meaning: pitch angle}',
  '  slope: {unit: deg/kpc, range: [-90, 90], default: 3, group: varying, meaning: change}',
  '  where: {unit: kpc, range: [0, 90], default: 0, group: varying, meaning: reference}',
  'choices:',
  '  parity: {options: {even: 1, odd: -1}, default: even, meaning: symmetry}',
  'define: {g: "exp(-r/core)"}',
  'potential: {phi: "strength*g*z"}',
  'edges: {z: [core, "-core"]}',
  'checks:',
  '  - {parameters: {strength: 2 uG, pitch: 10 deg}, at: [1, 2, 3], field: [0, 0, 1], source: by hand}',
  '  - {parameters: {strength: 2 uG, core: 500 pc, pitch: 10 deg, parity: odd}, at: [1, 2, 3], field: [0, 0, 1], source: by hand}',
];

function spoil(line: number, text: string): string {
  return [...disc.slice(0, line - 1), text, ...disc.slice(line)].join('\n');
}

function messageOf(run: () => unknown): string {
  try {
    run();
  } catch (error) {
    if (error instanceof InputError) return error.message;
    throw error;
  }
  return 'no error';
}

test('a right file becomes a model', () => {
  const model = parseModelFile(disc.join('\n'), 'models/disc.yaml');
  expect(model).toMatchObject({ name: 'disc', kind: 'field', define: { g: 'exp(-r/core)' }, edges: { z: ['core', '-core'] } });
  expect(model.formulas).toEqual({ potential: { phi: 'strength*g*z' } });
  expect(model.parameters.map(({ name }) => name)).toEqual(['strength', 'core', 'pitch', 'slope', 'where']);
  expect(model.parameters[1]).toEqual({ name: 'core', unit: 'kpc', range: [0, 50], default: 2, meaning: 'core radius' });
  expect(model.choices).toEqual([{ name: 'parity', options: { even: 1, odd: -1 }, default: 'even', meaning: 'symmetry' }]);
  expect(model.checks).toHaveLength(2);
});

test('parameters may be a list', () => {
  const listed = disc.map((line) => line.replace(/^ {2}(strength|core|pitch|slope|where): \{/, '  - {name: $1, ')).join('\n');
  expect(parseModelFile(listed, 'models/disc.yaml')).toEqual(parseModelFile(disc.join('\n'), 'models/disc.yaml'));
  const bad = listed.replace('default: 2', 'default: 60');
  expect(messageOf(() => parseModelFile(bad, 'models/disc.yaml'))).toBe(
    'models/disc.yaml:8:54: parameter "core" has default 60 kpc, outside its range 0 to 50 kpc',
  );
});

describe('what does not load, and the words', () => {
  test.each<[number, string, string]>([
    [1, 'name: ring', '1:7: the model "ring" must be in a file of its name, not disc.yaml'],
    [1, 'name: Disc', '1:7: name: "Disc" is no model name: small letters, digits and - are wanted, as in the file\'s name'],
    [2, 'kind: potential', '2:7: kind: "potential" is not allowed: kind is one of field, density'],
    [5, '', '1:1: source is missing: the published source, or that it is an own definition, is wanted'],
    [5, 'sauce: x', '5:1: unknown key "sauce" (did you mean "source"?); allowed are name, kind, title, meaning, source, parameters, choices, define, potential, armPotential, euler, field, density, edges, checks'],
    [8, '  core: {unit: kpc, range: [0, 50], default: 60, meaning: core radius}', '8:46: parameter "core" has default 60 kpc, outside its range 0 to 50 kpc'],
    [8, '  core: {unit: kps, range: [0, 50], meaning: core radius}', '8:16: unknown unit "kps" (did you mean "kpc"?); units are kpc, pc, Mpc, m, cm, km, arcsec, arcmin, deg, rad, sr, s, Myr, Gyr, Hz, kHz, MHz, GHz, G, T, uG, nG, mG, Jy, mJy, uJy, MJy, beam, K'],
    [8, '  core: {unit: kpc, range: [50, 0], meaning: core radius}', '8:28: parameter "core" has the range 50 to 0, which is empty'],
    [8, '  core: {unit: kpc, range: [0, .inf], meaning: core radius}', '8:32: parameters.core.range, item 2: Infinity is given where a number is wanted'],
    [8, '  core: {unit: kpc, range: [0, 50], whole: true, default: 1.5, meaning: core radius}', '8:59: parameter "core" has default 1.5 kpc, outside its range a whole number, 0 to 50 kpc'],
    [8, '  core: {unit: kpc, range: [0, 50], meaning: core radius, of the disc}', '8:59: parameters.core: unknown key "of the disc": a text with a comma inside { } needs quotes'],
    [8, '  core: {unit: kpc, range: [0, 50]}', '8:9: parameters.core.meaning is missing: the meaning is wanted'],
    [8, '  phi: {unit: kpc, range: [0, 50], meaning: core radius}', '8:8: the name "phi" of a parameter is already that of a word of formulas or scenes'],
    [8, '  even: {unit: kpc, range: [0, 50], meaning: core radius}', '13:28: the name "even" of an option is already that of a parameter'],
    [11, '  where: {unit: kpc, range: [0, 90], group: varying, meaning: reference}', '11:10: parameter "where" is of the group "varying" and so may be left out, but has no default'],
    [13, '  parity: {options: {even: 1}, meaning: symmetry}', '13:21: choice "parity" has 1 options; at least 2 are wanted'],
    [13, '  parity: {options: {even: 1, odd: -1}, default: evn, meaning: symmetry}', '13:50: choice "parity" has default "evn", which is none of even, odd'],
    [14, 'define: {core: "2*r"}', '14:16: the name "core" of a definition is already that of a parameter'],
    [14, 'define: {"a b": "2*r"}', '14:10: define.a b: "a b" is no name: a letter, then letters and digits are wanted, 40 at most'],
    [15, 'density: "strength"', '15:10: a field has no "density": give "potential", "euler" or "field"'],
    [15, '', '1:1: a field needs "potential", "euler" or "field"'],
    [15, 'potential: {phi: "z", x: "y"}', '15:12: potential has the components phi, x: some of r, phi, z or some of x, y, z are allowed'],
    [15, 'potential: {}', '15:12: potential has no component: r, phi, z or x, y, z are wanted'],
    [15, 'potential: {phi: "z"}\nfield: {r: "1"}', '16:8: potential and field are given: one of them, or potential with field: {phi}, is allowed'],
    [15, 'euler: {a: "z"}', '15:8: euler.b is missing: a formula is wanted'],
    [19, '', '18:3: checks: a list of 1 is given: 2 to 1000 checks are allowed'],
    [18, '  - {parameters: {strength: 2 uG, pitch: 10 deg}, at: [1, 2, 3], density: 1, source: by hand}', '18:5: a check of a field model needs "field"'],
    [18, '  - {parameters: {strength: 2 uG, pitch: 10 deg}, at: [1, 2], field: [0, 0, 1], source: by hand}', '18:55: checks, item 1, at: three numbers are wanted'],
    [18, '  - {parameters: {strength: 2 uG, pitch: 10 deg}, at: [1, 2, 3], field: [0, 0, 1]}', '18:5: checks, item 1, source is missing: the source of the number is wanted'],
    [18, '  - {parameters: {pitch: 10 deg}, at: [1, 2, 3], field: [0, 0, 1], source: by hand}', '18:18: checks, item 1, parameters.strength is missing: a magnetic field is wanted, such as "2 uG" (-100 to 100 uG)'],
    [18, '  - {parameters: {strength: 2 uG, pitch: 0 deg}, at: [1, 2, 3], field: [0, 0, 1], source: by hand}', '18:42: checks, item 1, parameters.pitch: "0 deg" is not allowed: -90 to 90 deg, not 0'],
    [18, '  - {parameters: {strength: 2 uG, pitch: 1 deg, slope: 1 deg/kpc}, at: [1, 2, 3], field: [0, 0, 1], source: by hand}', '18:18: "slope" is given without "where": slope, where (varying) go together or not at all'],
  ])('line %d as %s', (line, text, message) => {
    expect(messageOf(() => parseModelFile(spoil(line, text), 'models/disc.yaml'))).toBe(`models/disc.yaml:${message}`);
  });

  test('a density given as a field', () => {
    const text = spoil(2, 'kind: density');
    expect(messageOf(() => parseModelFile(text, 'models/disc.yaml'))).toBe('models/disc.yaml:15:12: a density has no "potential": give "density"');
  });
});

test('values are filled in the units formulas see', () => {
  const model = parseModelFile(disc.join('\n'), 'models/disc.yaml');
  const read = (text: string) => fillValues(model, checkYaml(readYaml(text, 'values'), keys(valuesShape(model))));
  const degree = Math.PI / 180;
  const { parameters, choices } = read('{strength: -2000 nG, pitch: 30 arcmin, slope: 2 deg/kpc, where: 500 pc, parity: odd}');
  expect(choices).toEqual({ parity: 'odd' });
  expect(parameters).toMatchObject({ strength: -2, core: 2, where: 0.5 });
  // One rounding for each factor of the conversion.
  expect(Math.abs(parameters.pitch / (degree / 2) - 1)).toBeLessThan(4e-16);
  expect(Math.abs(parameters.slope / (2 * degree) - 1)).toBeLessThan(4e-16);
  const defaults = read('{strength: 1 uG, pitch: 1 deg}').parameters;
  expect(Math.abs(defaults.slope / (3 * degree) - 1)).toBeLessThan(4e-16);
  expect(model.parameters.map(internalUnit)).toEqual(['uG', 'kpc', 'rad', 'rad/kpc', 'kpc']);
});

describe('the library', () => {
  test('holds every file of models/ under its name', () => {
    const files = readdirSync('models').filter((file) => file.endsWith('.yaml'));
    expect(files.length).toBeGreaterThan(0);
    expect([...modelLibrary().keys()]).toEqual(files.map((file) => file.replace('.yaml', '')).sort());
    expect(getModel('uniform')).toBe(getModel('uniform'));
  });

  test('names the nearest model, and refuses one of the other kind', () => {
    expect(messageOf(() => getModel('quadrupol-halo'))).toMatch(/^unknown model "quadrupol-halo" \(did you mean "quadrupole-halo"\?\); models are /);
    expect(messageOf(() => getModel('constructor'))).toMatch(/^unknown model "constructor"/);
    expect(messageOf(() => getModel('sech2-disc', 'field'))).toMatch(/^the model "sech2-disc" is a density, but a field is wanted; those are /);
    expect(getModel('quadrupole-halo', 'field').title).toBe(modelLibrary().get('quadrupole-halo')?.title);
  });
});

test('the example of models/README.md loads', () => {
  const text = /```yaml\n([\s\S]*?)```/.exec(readFileSync('models/README.md', 'utf8'))?.[1] ?? '';
  const model = parseModelFile(text, 'models/shell-disc.yaml');
  // 0.03 (1 - 1/e) at r = hole in the plane; rounding only.
  expect(Math.abs((model.checks[0].density ?? 0) / (0.03 * (1 - 1 / Math.E)) - 1)).toBeLessThan(4e-16);
  expect(model.checks[1].density).toBe(0);
});
