import { describe, expect, test } from 'vitest';
import { parseScene, sceneText } from '../../src/scene/parse-scene.ts';
import { fullScene, messageOf } from './support.ts';

const text = fullScene.join('\n');

function withSet(...settings: readonly string[]) {
  const overrides = settings.map((setting) => {
    const [path, value] = setting.split(/=(.*)/s);
    return { path, value, flag: `--set ${setting}` };
  });
  return { scene: () => parseScene(text, 's.yaml', overrides), text: () => sceneText(text, 's.yaml', overrides) };
}

describe('values are set', () => {
  test('numbers, words, lists, models', () => {
    const scene = withSet(
      'field.halo.strength=3 uG', 'field.toroidal-halo.parity=even', 'observation.image.pixels=[8, 4]', 'cosmicRays.thick.height=2 kpc',
      'cosmicRays.index=3', 'galaxy.inclination=70 deg', 'field.mine.a=2 kpc', 'field.mine.parameters.q=1 uG kpc^2', 'observation.bands.C.width=1 MHz',
      'title=Another: title',
    );
    expect(messageOf(scene.scene)).toMatch(/^--set title=Another: title: /);
    const changed = withSet(
      'field.halo.strength=3 uG', 'field.toroidal-halo.parity=even', 'observation.image.pixels=[8, 4]', 'cosmicRays.thick.height=2 kpc',
      'cosmicRays.index=3', 'field.mine.a=2 kpc', 'field.mine.parameters.q=1 uG kpc^2', 'observation.bands.C.width=1 MHz', 'title="Another: title"',
    ).scene();
    expect(changed.field[1].parameters.strength).toBe(3);
    expect(changed.field[2].choices.parity).toBe('even');
    expect(changed.field[3].parameters).toEqual({ q: 1, a: 2 });
    expect(changed.observation.image).toMatchObject({ nx: 8, ny: 4 });
    expect(changed.observation.bands[1].channels[0].widthHz).toBe(1e6);
    expect(changed.cosmicRays).toMatchObject({ index: 3, layers: [{ parameters: { height: 2 } }] });
    expect(changed.title).toBe('Another: title');
  });

  test('a model is exchanged for one with the same parameters', () => {
    const scene = withSet('field.halo.model=dipole-halo').scene();
    expect(scene.field[1].model.name).toBe('dipole-halo');
  });

  test('missing keys and groups are added', () => {
    const bare = text.replace(/^ {2}foreground:.*\n/m, '');
    const scene = parseScene(bare, 's.yaml', [{ path: 'observation.foreground.depth', value: '5 rad/m^2', flag: '--set' }]);
    expect(scene.observation.foregroundDepth).toBe(5);
  });

  test('the last of two wins', () => {
    expect(withSet('cosmicRays.index=3', 'cosmicRays.index=2').scene().cosmicRays.index).toBe(2);
  });

  test('an aliased value changes only where it is set', () => {
    const aliased = text.replace('core: 2 kpc', 'core: &c 2 kpc').replace('innerRadius: 1 kpc', 'innerRadius: *c');
    const set = (path: string) => parseScene(aliased, 's.yaml', [{ path, value: '3 kpc', flag: '--set' }]).field;
    expect(set('field.halo.core').map(({ parameters }) => parameters.core ?? parameters.innerRadius)).toEqual([undefined, 3, 2, undefined]);
    expect(set('field.toroidal-halo.innerRadius').map(({ parameters }) => parameters.core ?? parameters.innerRadius)).toEqual([undefined, 2, 3, undefined]);
  });
});

describe('errors are placed at the flag', () => {
  test.each([
    ['field.halo.strength=3 kpc', 'field.halo.strength: "3 kpc" is a length: a magnetic field is wanted, such as "2 uG"'],
    ['field.halo.stength=3 uG', 'field.halo: unknown key "stength" (did you mean "strength"?); allowed are model, name, strength, core, reference, arms, flare, hole'],
    ['field.hallo.strength=3 uG', 'field has nothing named "hallo" (did you mean "halo"?); it has uniform, halo, toroidal-halo, mine'],
    ['cosmicRays.thin.height=3 kpc', 'cosmicRays has nothing named "thin"; it has thick'.replace('"thin";', '"thin" (did you mean "thick"?);')],
    ['galaxy.inclination.x=3', 'galaxy.inclination is a single value and has no "x"'],
    ['galaxy..x=3', '"galaxy..x" is no path: names joined by single dots are wanted, such as galaxy.inclination'],
    ['galaxy.inclination=', 'there is no value after ='],
    ['galaxy.inclination=*x', 'not valid YAML: Unresolved alias (the anchor must be set before the alias): x'],
    ['galaxy.inclination=200 deg', 'galaxy.inclination: "200 deg" is outside 0 to 180 deg'],
    ['gyrelight=2', 'gyrelight: 2 is a newer file format than this version can read (it reads 1)'],
    ['observation.image.pixels=0', 'observation.image.pixels: 0 is not allowed: a whole number, 1 to 16384'],
    ['__proto__.x=1', 'unknown key "__proto__"; allowed are gyrelight, title, galaxy, field, thermalElectrons, cosmicRays, turbulence, freeFree, dust, zeeman, observation, numerics'],
  ])('%s', (setting, message) => expect(messageOf(withSet(setting).scene)).toBe(`--set ${setting}: ${message}`));

  test('a name that fits two', () => {
    const twice = text.replace('name: mine', 'name: halo');
    const run = () => parseScene(twice, 's.yaml', [{ path: 'field.halo.core', value: '1 kpc', flag: '--set x' }]);
    expect(messageOf(run)).toBe('--set x: "halo" fits 2 items of field: give them different names');
  });

  test('errors elsewhere keep their place in the file', () => {
    const run = () => parseScene(text.replace('rms: 4 uG', 'rms: 4'), 's.yaml', [{ path: 'cosmicRays.index', value: '3', flag: '--set x' }]);
    expect(messageOf(run)).toMatch(/^s\.yaml:21:21: turbulence\.unresolved\.rms: 4 has no unit/);
  });
});

test('the text with the settings written in parses to the same scene', () => {
  const { scene, text: changed } = withSet('field.halo.core=1 kpc', 'observation.foreground.depth=-3 rad/m^2', 'observation.image.pixels=[8, 4]');
  expect(parseScene(changed(), 's.yaml')).toEqual(scene());
  expect(withSet().text()).toBe(text);
});
